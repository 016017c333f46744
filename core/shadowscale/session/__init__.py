"""The state of a piece of work: what was loaded, wished, solved; undo; files."""
