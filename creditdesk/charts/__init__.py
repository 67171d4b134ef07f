"""Charts as matplotlib figures, the same for window and paper."""
