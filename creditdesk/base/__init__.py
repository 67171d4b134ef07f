"""Ground the rest stands on: errors, findings, numbers."""
