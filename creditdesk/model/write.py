"""A model as the text of its file."""

import msgspec
import tomli_w

from creditdesk.model.spec import ModelSpec


def to_toml(spec: ModelSpec) -> str:
    """Write a model as TOML; equal models give equal text, and reading the text gives the equal model."""
    return tomli_w.dumps(msgspec.to_builtins(spec), multiline_strings=False)


def from_toml(text: str) -> ModelSpec:
    """Read a model from TOML; raises msgspec.ValidationError or DecodeError at the first wrong type or unknown key."""
    return msgspec.toml.decode(text, type=ModelSpec)
