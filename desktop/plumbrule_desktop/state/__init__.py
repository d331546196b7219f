"""What the window knows, without widgets: QtCore alone."""
