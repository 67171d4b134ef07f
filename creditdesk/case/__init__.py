"""The case of one obligor: document, edits, storage, assessment."""
