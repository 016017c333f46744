"""Tables of measurements: reading, columns, clocks; every row accounted for."""
