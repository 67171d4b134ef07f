"""Load a house book: a folder of TOML files, or the same files from memory, compiled, with all faults at once."""

import hashlib
import re
from collections.abc import Callable, Iterable, Mapping
from difflib import get_close_matches
from pathlib import Path
from typing import TypeVar

from creditdesk.base.errors import UserError
from creditdesk.flow import book as flows
from creditdesk.flow.book import FlowBook
from creditdesk.grading import scale as scales
from creditdesk.grading.rules import RuleBook, RuleFile, compile_rules
from creditdesk.grading.scale import MasterScale
from creditdesk.house.book import HouseBook, HouseSettings, LoadedModel
from creditdesk.house.check import chart_faults, settings_faults
from creditdesk.house.decode import SIZE_LIMIT, decode_toml
from creditdesk.house.files import read_file
from creditdesk.house.targets import stress_faults, targets_of
from creditdesk.model import check as models
from creditdesk.model.spec import ModelSpec
from creditdesk.ratios.catalogue import Catalogue, compile_catalogue
from creditdesk.ratios.spec import RatioFile
from creditdesk.scenario import stress as stresses
from creditdesk.scenario.stress import StressBook
from creditdesk.statements.chart import Chart

Value = TypeVar("Value")
FILES = ("house.toml", "lines.toml", "ratios.toml", "scale.toml", "rules.toml")
"""Files every house book has, beside at least one in ``models/``."""
OPTIONAL = ("flow.toml", "stress.toml")
"""Files of what-if; a house book without them does everything else."""
_MODEL = re.compile(r"models/[^/]+\.toml")
_FOLDER_LIMIT = 200


def load_house_book(folder: Path) -> HouseBook:
    """Load a house book from a folder.

    Read are the TOML files of the folder and of its folder ``models``. Raises UserError ``no_house_book`` or
    ``house_book``, the latter with one line per fault of all files.
    """
    return house_book_from_files(_read_folder(folder), place=str(folder))


def house_book_from_files(files: Mapping[str, bytes], *, place: str = "house book") -> HouseBook:
    """Compile a house book from its files: relative POSIX name -> content. ``place`` names it in messages.

    Raises UserError ``house_book`` with one line per fault of all files.
    """
    gather = _Gather(files, place)
    gather.note(_faults_of_names(files))
    settings = gather.read("house.toml", HouseSettings)
    chart = gather.read("lines.toml", Chart)
    ratio_file = gather.read("ratios.toml", RatioFile)
    scale = gather.read("scale.toml", MasterScale)
    rule_file = gather.read("rules.toml", RuleFile)
    flow = gather.read("flow.toml", FlowBook)
    stress = gather.read("stress.toml", StressBook)
    specs = {name: gather.read(name, ModelSpec) for name in sorted(files) if _MODEL.fullmatch(name)}
    if chart is not None:
        gather.note(f"lines.toml: {fault.sentence}" for fault in chart_faults(chart))
    if scale is not None:
        gather.note(f"scale.toml: {fault}" for fault in scales.faults(scale))
    if stress is not None:
        gather.note(f"stress.toml: {fault}" for fault in stresses.faults(stress))
    catalogue = rules = None
    if chart is not None and ratio_file is not None and not gather.faults_of("lines.toml"):
        catalogue = _catalogue(gather, ratio_file, chart)
        if flow is not None:
            gather.note(f"flow.toml: {fault}" for fault in flows.faults(flow, chart))
    if catalogue is not None and stress is not None:
        targets = targets_of(catalogue.chart, catalogue)
        gather.note(f"stress.toml: {fault.sentence}" for fault in stress_faults(stress, targets))
    if catalogue is not None and scale is not None and rule_file is not None:
        rules = _rules(gather, rule_file, scale, catalogue)
    loaded = _models(gather, specs, catalogue)
    if settings is not None and catalogue is not None:
        leads = {name: model.spec.lead for name, model in loaded.items()}
        gather.note(f"house.toml: {fault.sentence}" for fault in settings_faults(settings, catalogue.keys, leads))
    gather.stop_at_faults()
    return HouseBook(
        settings=_there(settings),
        chart=_there(chart),
        catalogue=_there(catalogue),
        models=loaded,
        scale=_there(scale),
        rules=_there(rules),
        flow=flow,
        stress=stress,
        files=dict(sorted(files.items())),
        digest=digest_of_files(files),
    )


def load_model(path: Path, house: HouseBook) -> LoadedModel:
    """Load a model file from outside the house book, for use with it.

    Raises UserError ``no_file`` and so on, or ``faults`` with one line each.
    """
    return model_from_bytes(read_file(path, SIZE_LIMIT), house, file=str(path))


def model_from_bytes(data: bytes, house: HouseBook, *, file: str) -> LoadedModel:
    """Load a model from memory, as ``load_model`` does from a file; ``file`` names it in messages."""
    spec = decode_toml(data, ModelSpec, file=file)
    if found := models.faults(spec, house.catalogue.keys):
        raise UserError("faults", [f"{file}: {fault}" for fault in found])
    return LoadedModel(spec, _digest(data), outside=data)


def digest_of_files(files: Mapping[str, bytes]) -> str:
    """Identify files by names and contents: ``sha256:…`` over each name and content with its length, by name."""
    total = hashlib.sha256()
    for name in sorted(files):
        for part in (name.encode(), files[name]):
            total.update(len(part).to_bytes(8, "big") + part)
    return f"sha256:{total.hexdigest()}"


class _Gather:
    """Read files one by one and keep what is wrong with each."""

    def __init__(self, files: Mapping[str, bytes], place: str) -> None:
        self._files, self._place = files, place
        self._faults: list[str] = []

    def read(self, name: str, shape: type[Value]) -> Value | None:
        """Read one file; None where it has faults or is not there, which is noted elsewhere."""
        if name not in self._files:
            return None
        return self.attempt(lambda: decode_toml(self._files[name], shape, file=name), "")

    def content(self, name: str) -> bytes:
        """Give a file as it was read."""
        return self._files[name]

    def attempt(self, action: Callable[[], Value], prefix: str) -> Value | None:
        """Take a result, or note its faults."""
        try:
            return action()
        except UserError as error:
            self.note(f"{prefix}{fault}" for fault in error.faults)
            return None

    def note(self, faults: Iterable[str]) -> None:
        """Note faults, each beginning with the file's name."""
        self._faults += faults

    def faults_of(self, name: str) -> bool:
        """Tell whether a file has faults so far."""
        return any(fault.startswith(f"{name}: ") for fault in self._faults)

    def stop_at_faults(self) -> None:
        """Raise all faults in one error, if there is any."""
        if self._faults:
            raise UserError("house_book", [f"{self._place}/{fault}" for fault in dict.fromkeys(self._faults)])


def _there(value: Value | None) -> Value:
    """Take what is there because no fault was found."""
    if value is None:
        raise AssertionError("a part is missing without a fault")
    return value


def _catalogue(gather: _Gather, file: RatioFile, chart: Chart) -> Catalogue | None:
    return gather.attempt(lambda: compile_catalogue(file, chart), "ratios.toml: ")


def _rules(gather: _Gather, file: RuleFile, scale: MasterScale, catalogue: Catalogue) -> RuleBook | None:
    chart = catalogue.chart
    names = dict.fromkeys([*(item.key for item in chart.lines), *(total.key for total in chart.subtotals)])
    numbers = [*names, *(key for key in catalogue.keys if key not in names)]
    return gather.attempt(lambda: compile_rules(file, scale, numbers), "rules.toml: ")


def _models(
    gather: _Gather, specs: Mapping[str, ModelSpec | None], catalogue: Catalogue | None
) -> dict[str, LoadedModel]:
    """Check each model and name it as it names itself; a name that stands twice is a fault."""
    loaded: dict[str, LoadedModel] = {}
    for file, spec in specs.items():
        if spec is None:
            continue
        if catalogue is not None:
            gather.note(f"{file}: {fault}" for fault in models.faults(spec, catalogue.keys))
        if spec.name in loaded:
            gather.note([f'{file}: name: found "{spec.name}", which another model has, allowed a name of its own'])
        loaded[spec.name] = LoadedModel(spec, _digest(gather.content(file)))
    return loaded


def _digest(data: bytes) -> str:
    return f"sha256:{hashlib.sha256(data).hexdigest()}"


def _faults_of_names(files: Mapping[str, bytes]) -> list[str]:
    """Name the files that are missing, and those that nothing would read: probably a slip of the pen."""
    faults = [f"{name}: found no such file, a house book needs it" for name in FILES if name not in files]
    if not any(_MODEL.fullmatch(name) for name in files):
        faults.append("models: found no model file, a house book needs at least one")
    known = (*FILES, *OPTIONAL)
    for name in files:
        if name not in known and not _MODEL.fullmatch(name):
            near = get_close_matches(name, known, n=1)
            hint = f"; nearest known name: {near[0]}" if near else ""
            faults.append(f"{name}: found a file of an unknown name, allowed {', '.join(known)}, models/*.toml{hint}")
    return faults


def _read_folder(folder: Path) -> dict[str, bytes]:
    try:
        paths = sorted([*folder.glob("*.toml"), *folder.glob("models/*.toml")])
    except OSError as error:
        raise UserError("no_house_book", f"{folder}: cannot be read ({error.strerror})") from error
    if not paths:
        what = "no TOML file in it" if folder.is_dir() else "no such folder"
        raise UserError("no_house_book", f"{folder}: {what}: not a house book")
    if len(paths) > _FOLDER_LIMIT:
        raise UserError("no_house_book", f"{folder}: found {len(paths)} TOML files, allowed at most {_FOLDER_LIMIT}")
    return {path.relative_to(folder).as_posix(): read_file(path, SIZE_LIMIT) for path in paths}
