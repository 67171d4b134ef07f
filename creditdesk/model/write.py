"""A model as the text of its file."""

import re
from typing import Any

import msgspec
import tomli_w

from creditdesk.model.spec import ModelSpec

_INNER_LIST = re.compile(r"\[\n(?P<items>(?:[ ]+[^\[\]\n]+,\n)+)[ ]*\]")
_WIDTH = 100


def to_toml(spec: ModelSpec) -> str:
    """Write a model as TOML; equal models give equal text, and reading the text gives the equal model.

    Lists of numbers stand on one line each, so that a covariance reads as a matrix.
    """
    text = tomli_w.dumps(_without_empty(msgspec.to_builtins(spec)), multiline_strings=False)
    return _INNER_LIST.sub(_on_one_line, text)


def from_toml(text: str) -> ModelSpec:
    """Read a model from TOML; raises msgspec.ValidationError or DecodeError at the first wrong type or unknown key."""
    return msgspec.toml.decode(text, type=ModelSpec)


def _without_empty(table: dict[str, Any]) -> dict[str, Any]:
    """Leave out empty tables: they stand for the default."""
    pruned = {key: _pruned(item) for key, item in table.items()}
    return {key: item for key, item in pruned.items() if item != {}}


def _pruned(item: Any) -> Any:  # noqa: ANN401 - any value a TOML file can hold
    if isinstance(item, dict):
        return _without_empty(item)
    return [_pruned(one) for one in item] if isinstance(item, list | tuple) else item


def _on_one_line(found: re.Match[str]) -> str:
    items = [line.strip().rstrip(",") for line in found["items"].splitlines()]
    joined = f"[{', '.join(items)}]"
    return found[0] if len(joined) > _WIDTH and items[0].startswith('"') else joined
