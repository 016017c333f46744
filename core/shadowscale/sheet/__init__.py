"""The fitted-parameter sheet and its renderings."""
