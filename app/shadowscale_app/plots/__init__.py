"""Drawing: pyqtgraph items and painted pictures."""
