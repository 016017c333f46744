"""What a screen needs of a session, as numbers and words: points, curves, pictures, table rows."""
