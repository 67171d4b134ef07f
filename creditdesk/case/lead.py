"""The lead model of a case: a name in the house book, or a model file beside the case."""

from pathlib import Path

from creditdesk.case.document import Case
from creditdesk.house.book import HouseBook, with_model
from creditdesk.house.load import load_model


def with_lead_model(house: HouseBook, case: Case, folder: Path) -> HouseBook:
    """Return the house book with the case's lead model in it; a path is read from ``folder`` where it is relative.

    Raises UserError where the file is no usable model. A name the house book does not have is left to the assessment,
    which names the nearest.
    """
    return with_named_model(house, case.model.lead, folder)


def with_named_model(house: HouseBook, name: str, folder: Path) -> HouseBook:
    """Return the house book with the model ``name``, reading it from a file where the name is a path."""
    if not name or name in house.models or not name.endswith(".toml"):
        return house
    return with_model(house, load_model(folder / name, house), name)
