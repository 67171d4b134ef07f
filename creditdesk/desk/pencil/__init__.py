"""What the sheet Pencil is made of: the draft over the ink, its table, its scenarios and its assumptions."""
