"""Faults of a house book that only show when its files are seen together."""

import re
from collections import Counter
from collections.abc import Collection, Iterator, Mapping

from creditdesk.house.book import HouseSettings, Signer
from creditdesk.house.decode import Fault, nearest_name, show, unknown_name
from creditdesk.statements.chart import Chart, LineItem, Subtotal

FORMAT = "creditdesk-house"
VERSION = 1
ROLES = ("preparer", "approver")
KEY_RATIOS_MOST = 5
_KEY = re.compile(r"[a-z][a-z0-9_]*")
_FINGERPRINT = re.compile(r"[0-9a-f]{64}")


def chart_faults(chart: Chart) -> Iterator[Fault]:
    """Check keys, groups and parts of a chart of accounts."""
    yield from _key_faults(chart)
    groups = [group.key for group in chart.groups]
    lines = {item.key for item in chart.lines}
    known = lines | {total.key for total in chart.subtotals}
    named: tuple[tuple[str, tuple[LineItem | Subtotal, ...]], ...] = (
        ("lines", chart.lines),
        ("subtotals", chart.subtotals),
    )
    for section, items in named:
        for item in items:
            place = f"{section}.{item.key}"
            if item.group not in groups:
                yield unknown_name(f"{place}.group", item.group, groups, "group")
            yield from _part_faults(place, item, known)
    yield from _loop_faults(chart)


def _key_faults(chart: Chart) -> Iterator[Fault]:
    """Demand plain keys: a line's stands once, a subtotal's once for each layout of the income statement."""
    lines = Counter(item.key for item in chart.lines)
    totals = Counter((total.key, total.presentation) for total in chart.subtotals)
    keys = [("lines", key, count) for key, count in lines.items()]
    keys += [("subtotals", key, count + lines[key]) for (key, _), count in totals.items()]
    for section, key, count in keys:
        if not _KEY.fullmatch(key):
            yield Fault(f"{section}.{key[:40]}", show(key), "a key of small letters, digits and underscores")
        if count > 1:
            yield Fault(f"{section}.{key}", f"the key {count} times", "once")
    for key, count in Counter(group.key for group in chart.groups).items():
        if count > 1:
            yield Fault(f"groups.{key}", f"the key {count} times", "once")


def _part_faults(place: str, item: LineItem | Subtotal, known: Collection[str]) -> Iterator[Fault]:
    """Look up every name in every list of names that a line or subtotal has."""
    for field in item.__struct_fields__:
        value = getattr(item, field)
        for name in value if isinstance(value, tuple) else ():
            if name not in known:
                near = nearest_name(name, known)
                yield Fault(f"{place}.{field}", f'unknown line "{name[:60]}"', "a line or subtotal of this file", near)


def _loop_faults(chart: Chart) -> Iterator[Fault]:
    """Find subtotals that contain themselves."""
    parts: dict[str, set[str]] = {}
    for total in chart.subtotals:
        parts.setdefault(total.key, set()).update(total.adds, total.subtracts)
    open_totals = dict(parts)
    while ready := [key for key, inside in open_totals.items() if not inside & open_totals.keys()]:
        for key in ready:
            del open_totals[key]
    for key, inside in open_totals.items():
        within = ", ".join(sorted(inside & open_totals.keys()))
        yield Fault(f"subtotals.{key}", f"a sum that leads back to itself through {within}", "sums without a circle")


def settings_faults(settings: HouseSettings, ratios: Collection[str], models: Mapping[str, bool]) -> Iterator[Fault]:
    """Check ``house.toml``; ``ratios``: keys of the catalogue, ``models``: name -> whether it may lead."""
    if settings.format != FORMAT:
        yield Fault("format", show(settings.format), show(FORMAT))
    if settings.version != VERSION:
        yield Fault("version", show(settings.version), str(VERSION))
    if not 0 <= settings.pd_floor < 1:
        yield Fault("pd_floor", show(settings.pd_floor), "at least 0 and below 1")
    if not 0 < settings.interval_level < 1:
        yield Fault("interval_level", show(settings.interval_level), "above 0 and below 1")
    if settings.stale_after_months < 1:
        yield Fault("stale_after_months", show(settings.stale_after_months), "at least 1")
    if len(settings.key_ratios) > KEY_RATIOS_MOST:
        yield Fault("key_ratios", f"a list of {len(settings.key_ratios)}", f"at most {KEY_RATIOS_MOST}")
    for index, key in enumerate(settings.key_ratios):
        if key not in ratios:
            yield unknown_name(f"key_ratios[{index}]", key, ratios, "ratio")
    yield from _model_faults(settings, models)
    for index, signer in enumerate(settings.signers):
        yield from _signer_faults(f"signers[{index}]", signer)


def _model_faults(settings: HouseSettings, models: Mapping[str, bool]) -> Iterator[Fault]:
    if settings.lead_model not in models:
        yield unknown_name("lead_model", settings.lead_model, models, "model")
    elif not models[settings.lead_model]:
        leading = ", ".join(name for name, leads in models.items() if leads) or "none of this house book"
        yield Fault("lead_model", f"{settings.lead_model}, whose file says that it may not lead", leading)
    for index, name in enumerate(settings.second_opinions):
        if name not in models:
            yield unknown_name(f"second_opinions[{index}]", name, models, "model")


def _signer_faults(place: str, signer: Signer) -> Iterator[Fault]:
    if not _FINGERPRINT.fullmatch(signer.fingerprint):
        yield Fault(f"{place}.fingerprint", show(signer.fingerprint), "64 hex digits in lower case (SHA-256)")
    for role in signer.roles:
        if role not in ROLES:
            yield unknown_name(f"{place}.roles", role, ROLES, "role")
