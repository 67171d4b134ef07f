import json

from creditdesk.memo.blocks import Grid, Listing, Pairs, Prose, Subheading, without_empty
from tests.contents import content

EMPTY = Grid("Nothing", ("a",), (), (1.0,))


def test_empty_tables_go_and_take_the_headings_that_headed_them_along() -> None:
    blocks = [
        Prose("one"),
        Subheading("gone"),
        EMPTY,
        Subheading("kept"),
        Listing(("two",)),
        Subheading("last"),
        Pairs("", ()),
    ]
    assert without_empty(blocks) == (Prose("one"), Subheading("kept"), Listing(("two",)))


def test_a_content_is_plain_data_that_json_holds() -> None:
    plain = json.loads(json.dumps(content().plain(), allow_nan=False))
    assert plain["first"]["pd"] == 0.017
    assert plain["sections"][0]["blocks"][1]["rows"][1]["cells"][1]["number"] == 0.0
