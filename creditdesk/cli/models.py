"""The model a command was asked to apply."""

from difflib import get_close_matches
from pathlib import Path

from creditdesk.base.errors import UserError
from creditdesk.case.lead import with_named_model
from creditdesk.house.book import HouseBook


def with_model_asked_for(house: HouseBook, name: str) -> HouseBook:
    """Return the house book with the model of ``--model``: one of its own, or a file; a blank name asks for none.

    Raises UserError naming the nearest where there is no such model, or where the file is no usable model.
    """
    found = with_named_model(house, name, Path.cwd())
    if name and name not in found.models:
        near = get_close_matches(name, house.models, n=1)
        hint = f" Did you mean {near[0]}?" if near else ""
        raise UserError("model", f"--model: found {name!r}, allowed: a model file or {', '.join(house.models)}.{hint}")
    return found
