"""The house book: everything a house configures."""
