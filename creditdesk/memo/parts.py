"""What a memo carries: the names of its attachments, which issuing and verifying share."""

CASE = "case.toml"
RESULT = "result.json"
HOUSE_BOOK = "housebook.zip"
MODELS = "models/"
"""Folder of models that stand outside the house book."""
