"""Contact times, absolute dimensions and the Roche lobe."""
