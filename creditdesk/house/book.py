"""The house book: line items, ratios, models, master scale, rules and settings of one house, compiled once."""

from collections.abc import Mapping
from dataclasses import dataclass, replace

import msgspec

from creditdesk.flow.book import FlowBook
from creditdesk.grading.rules import RuleBook
from creditdesk.grading.scale import MasterScale
from creditdesk.model.spec import ModelSpec
from creditdesk.ratios.catalogue import Catalogue
from creditdesk.scenario.stress import StressBook
from creditdesk.statements.chart import Chart


class Signer(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """Pin one signer: the certificate's SHA-256 fingerprint in lower-case hex and the role it may sign in."""

    name: str
    fingerprint: str
    roles: tuple[str, ...] = ("preparer", "approver")


class HouseSettings(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """Hold ``house.toml``: who the house is and what it has decided.

    ``pd_floor``: lowest PD used for a grade, in [0, 1). ``interval_level``: confidence level in (0, 1).
    ``key_ratios``: the five printed on page 1 of the memo. ``stale_after_months``: age of figures that raises a query.
    """

    format: str
    version: int
    lender: str
    label: str
    book_version: str
    invented: bool
    lead_model: str
    pd_floor: float
    interval_level: float
    stale_after_months: int
    key_ratios: tuple[str, ...]
    second_opinions: tuple[str, ...]
    cautions: tuple[str, ...]
    signers: tuple[Signer, ...] = ()


@dataclass(frozen=True, slots=True)
class LoadedModel:
    """Hold a model with the digest ``sha256:…`` of the file it was read from.

    ``outside``: the file's bytes where it is none of the house book's own, so that a memo can carry it along.
    """

    spec: ModelSpec
    digest: str
    outside: bytes = b""


@dataclass(frozen=True)
class HouseBook:
    """Hold a compiled house book.

    ``files``: relative name -> bytes as read, the source of ``digest`` and of the zip. ``flow`` and ``stress``:
    None where the house has no such file; without the former there is no what-if.
    """

    settings: HouseSettings
    chart: Chart
    catalogue: Catalogue
    models: Mapping[str, LoadedModel]
    scale: MasterScale
    rules: RuleBook
    files: Mapping[str, bytes]
    digest: str
    flow: FlowBook | None = None
    stress: StressBook | None = None


def with_model(house: HouseBook, model: LoadedModel, name: str = "") -> HouseBook:
    """Return the house book with one more model in it, under ``name`` or the model's own name.

    Files and digest stay those of the house book as it was read: the model comes with a digest of its own.
    """
    return replace(house, models={**house.models, name or model.spec.name: model})
