"""Whether the model is allowed to speak."""
