import datetime
import math
import tomllib
from collections.abc import Mapping
from contextlib import suppress
from enum import StrEnum
from typing import Annotated

import msgspec
import pytest
from hypothesis import given
from hypothesis import strategies as st

from creditdesk.base.errors import UserError
from creditdesk.house.decode import FAULTS_SHOWN, SIZE_LIMIT, Fault, decode_toml, parse_toml


class Colour(StrEnum):
    OCHRE = "ochre"
    UMBER = "umber"


class Leaf(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    ends: datetime.date
    months: int
    colour: Colour = Colour.OCHRE
    opinion: Colour | None = None


class Tree(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    name: str
    leaves: tuple[Leaf, ...]
    weights: Mapping[str, tuple[float, ...]] = {}
    rates: Mapping[str, datetime.date | float] = {}
    share: Annotated[float, msgspec.Meta(ge=0, lt=1)] = 0.0
    pair: tuple[int, str] = (0, "")
    by_colour: Mapping[Colour, float] = {}


GOOD = 'name = "a"\nleaves = [{ends = 2025-12-31, months = 12}]\n'


def faults_of(text: str | bytes, **options: object) -> tuple[str, ...]:
    data = text if isinstance(text, bytes) else text.encode()
    with pytest.raises(UserError) as caught:
        decode_toml(data, Tree, file="f.toml", **options)  # type: ignore[arg-type]
    assert caught.value.exit_code == 3
    return caught.value.faults


def faults_or_none(data: bytes) -> tuple[str, ...]:
    try:
        decode_toml(data, Tree, file="f.toml")
    except UserError as error:
        return error.faults or ("an error without a fault",)
    return ()


def test_reads_dates_numbers_and_blanks() -> None:
    tree = decode_toml(
        (GOOD + "weights = {a = [1, 2.5, nan]}\nrates = {date = 2025-12-31, USD = 1}\n").encode(), Tree, file="f"
    )
    assert tree.leaves[0].ends == datetime.date(2025, 12, 31)
    assert tree.weights["a"][:2] == (1.0, 2.5)
    assert math.isnan(tree.weights["a"][2])
    assert tree.rates == {"date": datetime.date(2025, 12, 31), "USD": 1.0}


def test_a_byte_order_mark_is_no_fault() -> None:
    assert decode_toml(b"\xef\xbb\xbf" + GOOD.encode(), Tree, file="f").name == "a"


def test_lists_every_fault_with_place_found_allowed_and_nearest() -> None:
    text = """
nme = "a"
share = 1.0
pair = [1]
[[leaves]]
ends = "2025-12-31x"
months = 12.5
color = "ochre"
[[leaves]]
ends = 2025-12-31T10:00:00
months = true
colour = "ocher"
opinion = "umbra"
[weights]
a = [1, "2"]
b = 3
[rates]
date = "soon"
"""
    assert set(faults_of(text)) == {
        'f.toml: nme: found unknown key "nme", allowed one of by_colour, leaves, name, pair, rates, share, weights'
        "; nearest known name: name",
        "f.toml: name: found nothing, allowed a value: this key is required",
        "f.toml: share: found 1.0, allowed below 1",
        "f.toml: pair: found a list of 1, allowed a list of at least 2",
        'f.toml: leaves[0].ends: found "2025-12-31x", allowed a date such as 2025-12-31',
        "f.toml: leaves[0].months: found 12.5, allowed a whole number",
        'f.toml: leaves[0].color: found unknown key "color", allowed one of colour, ends, months, opinion'
        "; nearest known name: colour",
        "f.toml: leaves[1].ends: found 2025-12-31T10:00:00, allowed a date such as 2025-12-31",
        "f.toml: leaves[1].months: found true, allowed a whole number",
        'f.toml: leaves[1].colour: found "ocher", allowed "ochre" or "umber"; nearest known name: ochre',
        'f.toml: leaves[1].opinion: found "umbra", allowed "ochre" or "umber"; nearest known name: umber',
        'f.toml: weights.a[1]: found "2", allowed a number',
        "f.toml: weights.b: found 3, allowed a list in [ ]",
        'f.toml: rates.date: found "soon", allowed a date such as 2025-12-31 or a number',
    }


def test_an_enumeration_as_key_is_checked() -> None:
    (fault,) = faults_of(GOOD + "by_colour = {ocher = 1.0}\n")
    assert "by_colour" in fault
    assert "ocher" in fault


def test_extra_faults_join_the_list_and_are_asked_on_faulty_files() -> None:
    def extra(table: Mapping[str, object]) -> list[Fault]:
        return [Fault("name", f"{table.get('name')}", "another")]

    assert faults_of(GOOD, extra_faults=extra) == ("f.toml: name: found a, allowed another",)
    both = faults_of(GOOD + 'share = "x"\n', extra_faults=extra)
    assert both == (
        'f.toml: share: found "x", allowed a number',
        "f.toml: name: found a, allowed another",
    )


@pytest.mark.parametrize(
    ("data", "part"),
    [
        (b"\x00\x01\x02[[[", "line 1, column 1: not readable as TOML"),
        (b"a = 1\nb = '''", "line 2, column 8: not readable as TOML"),
        (b"a = 1\nb = \xff", "line 2, column 5: not UTF-8 text (byte 0xff)"),
        (b"a = 2025-02-30", "line 1, column 5: not readable as TOML: Invalid date"),
        (b"a = 1\na = 2", "line 2, column 6: not readable as TOML: Cannot overwrite a value"),
        (b"a = " + b"[" * 5000, "nested too deeply"),
        (b"a = " + b"9" * 5000, "not readable as TOML"),
        (b"#" * (SIZE_LIMIT + 1), "allowed at most 8000000"),
    ],
    ids=["binary", "open string", "latin-1", "date", "twice", "deep", "long number", "large"],
)
def test_what_is_no_toml_is_refused_with_line_and_column(data: bytes, part: str) -> None:
    (fault,) = faults_of(data)
    assert fault.startswith("f.toml: ")
    assert part in fault


def test_a_number_beyond_double_is_a_fault_not_a_crash() -> None:
    (fault,) = faults_of(GOOD + f"weights = {{a = [{'9' * 400}]}}\n")
    assert "weights" in fault


def test_a_fault_stays_on_one_line_whatever_the_file_holds() -> None:
    (fault,) = faults_of(GOOD + 'share = "a\\nb\\u0007"\n')
    assert fault == 'f.toml: share: found "a\\nb\\x07", allowed a number'


def test_a_flood_of_faults_is_cut_with_the_count() -> None:
    faults = faults_of(GOOD + "".join(f"k{number} = 1\n" for number in range(FAULTS_SHOWN + 7)))
    assert len(faults) == FAULTS_SHOWN + 1
    assert faults[-1] == "f.toml: and 7 more faults"


toml_values = st.recursive(
    st.booleans() | st.integers(-(2**70), 2**70) | st.floats() | st.text(max_size=8) | st.dates(),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=5), inner, max_size=3),
    max_leaves=12,
)


@given(st.dictionaries(st.sampled_from([*Tree.__struct_fields__, "other"]), toml_values))
def test_any_content_gives_a_value_or_faults(raw: dict[str, object]) -> None:
    import tomli_w

    data = tomli_w.dumps(raw).encode("utf-8")
    assert tomllib.loads(data.decode()).keys() == raw.keys()
    assert all(line.startswith("f.toml: ") and line.isprintable() for line in faults_or_none(data))


@given(st.binary(max_size=60))
def test_any_bytes_give_tables_or_a_named_error(data: bytes) -> None:
    with suppress(UserError):
        parse_toml(data, file="f.toml")
