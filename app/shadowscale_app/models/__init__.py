"""Qt item models over the engine's rows and results; no widget."""
