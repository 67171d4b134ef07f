"""What a memo carries: the names of its attachments, which issuing and verifying share."""

CASE = "case.toml"
RESULT = "result.json"
HOUSE_BOOK = "housebook.zip"
LEAD_MODEL = "lead-model.toml"
"""The lead model, only where its file is none of the house book's."""
