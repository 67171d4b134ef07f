"""The PDF memo: content, layout, signatures, verification."""
