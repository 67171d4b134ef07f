"""The sheets of the window."""
