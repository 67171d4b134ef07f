"""The sections of the three classifications of economic activity a case may use, in words."""

from collections.abc import Mapping

from creditdesk.case.document import SectorScheme

SECTIONS_ISIC4: Mapping[str, str] = {
    "A": "Agriculture, forestry and fishing",
    "B": "Mining and quarrying",
    "C": "Manufacturing",
    "D": "Electricity, gas, steam and air conditioning",
    "E": "Water supply, sewerage, waste management",
    "F": "Construction",
    "G": "Wholesale and retail trade",
    "H": "Transportation and storage",
    "I": "Accommodation and food service",
    "J": "Information and communication",
    "K": "Financial and insurance activities",
    "L": "Real estate activities",
    "M": "Professional, scientific and technical activities",
    "N": "Administrative and support services",
    "O": "Public administration and defence",
    "P": "Education",
    "Q": "Human health and social work",
    "R": "Arts, entertainment and recreation",
    "S": "Other services",
    "T": "Households as employers",
    "U": "Extraterritorial organizations",
}
"""Short names of the sections of ISIC Rev. 4 (United Nations, 2008; wording shortened, from memory)."""

SECTIONS_OF_2023: Mapping[str, str] = {
    "A": "Agriculture, forestry and fishing",
    "B": "Mining and quarrying",
    "C": "Manufacturing",
    "D": "Electricity, gas, steam and air conditioning",
    "E": "Water supply, sewerage, waste management",
    "F": "Construction",
    "G": "Wholesale and retail trade",
    "H": "Transportation and storage",
    "I": "Accommodation and food service",
    "J": "Publishing, broadcasting, content production",
    "K": "Telecommunication, programming, information services",
    "L": "Financial and insurance activities",
    "M": "Real estate activities",
    "N": "Professional, scientific and technical activities",
    "O": "Administrative and support services",
    "P": "Public administration and defence",
    "Q": "Education",
    "R": "Human health and social work",
    "S": "Arts, sports and recreation",
    "T": "Other services",
    "U": "Households as employers",
    "V": "Extraterritorial organizations",
}
"""Short names of the sections of ISIC Rev. 5 (United Nations, 2023) and NACE Rev. 2.1 (Regulation (EU) 2023/137).

The two agree on sections and letters; from J on the letters differ from those of ISIC Rev. 4. Wording shortened, from
memory.
"""

SCHEMES: Mapping[SectorScheme, str] = {
    SectorScheme.ISIC4: "ISIC Rev. 4",
    SectorScheme.ISIC5: "ISIC Rev. 5",
    SectorScheme.NACE21: "NACE Rev. 2.1",
}
_SHORT = {SectorScheme.ISIC4: "ISIC", SectorScheme.ISIC5: "ISIC 5", SectorScheme.NACE21: "NACE 2.1"}


def sections(scheme: SectorScheme) -> Mapping[str, str]:
    """Return the sections of a scheme, by letter."""
    return SECTIONS_ISIC4 if scheme is SectorScheme.ISIC4 else SECTIONS_OF_2023


def section_name(scheme: SectorScheme, letter: str) -> str:
    """Name a section; a letter the scheme does not have says so."""
    return sections(scheme).get(letter, "no section of that letter")


def short_scheme(scheme: SectorScheme) -> str:
    """Name a scheme as briefly as a heading allows."""
    return _SHORT[scheme]
