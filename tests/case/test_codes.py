from importlib import import_module

import pytest

from creditdesk.case.codes import COUNTRIES, CURRENCIES, SECTORS


def test_countries_are_those_of_the_iso_3166_package() -> None:
    """Source: ISO 3166-1 as carried by the package iso3166."""
    assert frozenset(import_module("iso3166").countries_by_alpha2) == COUNTRIES


def test_currencies_are_those_of_the_iso_4217_package() -> None:
    """Source: ISO 4217 list one as carried by the package iso4217."""
    assert frozenset(currency.code for currency in import_module("iso4217").Currency) == CURRENCIES


@pytest.mark.parametrize(("scheme", "sections"), [("ISIC4", 21), ("ISIC5", 22), ("NACE2.1", 22)])
def test_sections_run_from_a_without_a_gap(scheme: str, sections: int) -> None:
    """Counts of sections: from memory."""
    assert sorted(SECTORS[scheme]) == [chr(ord("A") + number) for number in range(sections)]
