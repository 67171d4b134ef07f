import tomllib
from collections.abc import Callable
from pathlib import Path

from msgspec.structs import replace

from creditdesk.model.spec import ModelSpec
from creditdesk.model.write import from_toml, to_toml

MakeSpec = Callable[..., ModelSpec]


def test_every_shipped_model_survives_writing_and_reading(model_files: list[Path]) -> None:
    for path in model_files:
        spec = from_toml(path.read_text(encoding="utf-8"))
        assert from_toml(to_toml(spec)) == spec


def test_equal_models_give_equal_text_without_empty_tables(make_spec: MakeSpec) -> None:
    text = to_toml(make_spec())
    assert text == to_toml(from_toml(text))
    assert "rules]\n\n[" not in text
    assert max(text.count(row) for row in ("matrix = [", "terms = [")) == 1


def test_difficult_texts_survive(make_spec: MakeSpec) -> None:
    for text in ('quote " and \\', "two\nlines", "[\n    1,\n]", "Über größe – 5 %", "[ a, b ]"):
        spec = replace(make_spec(), source=text, cautions=(text, "plain", text))
        assert from_toml(to_toml(spec)) == spec


def test_a_matrix_stands_one_row_on_a_line(make_spec: MakeSpec) -> None:
    rows = to_toml(make_spec()).split("matrix = [\n")[1].split("\n]")[0].splitlines()
    assert len(rows) == 6
    assert tomllib.loads(f"row = {rows[0].strip().rstrip(',')}")["row"] == list(make_spec().covariance.matrix[0])
