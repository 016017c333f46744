"""The desktop."""
