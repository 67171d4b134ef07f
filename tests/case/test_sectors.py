import pytest

from creditdesk.case.codes import SECTORS
from creditdesk.case.document import SectorScheme
from creditdesk.case.sectors import SCHEMES, section_name, sections


@pytest.mark.parametrize("scheme", list(SectorScheme))
def test_every_section_a_case_may_name_has_its_words(scheme: SectorScheme) -> None:
    assert set(sections(scheme)) == SECTORS[scheme.value]
    assert scheme in SCHEMES


def test_one_letter_means_different_things_in_different_schemes() -> None:
    assert section_name(SectorScheme.ISIC4, "L") == "Real estate activities"
    assert section_name(SectorScheme.ISIC5, "L") == "Financial and insurance activities"
    assert section_name(SectorScheme.ISIC4, "V") == "no section of that letter"
