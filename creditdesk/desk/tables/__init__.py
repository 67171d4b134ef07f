"""Item models that show the case in Qt tables."""
