"""Parts of sheets: each shows one matter and hands its edits on as commands."""
