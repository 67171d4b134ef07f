"""Where each section of the memo comes from: the sheets of the window on which it is made or seen."""

from collections.abc import Mapping

OBLIGOR, FIGURES, RATIOS, PENCIL, STANDING, MEMO = "Obligor", "Figures", "Ratios", "Pencil", "Standing", "Memo"

ORIGINS: Mapping[str, tuple[str, ...]] = {
    "The decision on one page": (OBLIGOR, STANDING, RATIOS, MEMO),
    "Characters that could not be printed": (OBLIGOR, MEMO),
    "Texts by the officer": (MEMO,),
    "Texts by the officer, in full": (MEMO,),
    "Figures": (FIGURES,),
    "Ratios": (RATIOS,),
    "Findings": (STANDING,),
    "Contributions of all factors": (STANDING,),
    "From score to grade": (STANDING,),
    "What-if and stress": (PENCIL,),
    "Model": (OBLIGOR,),
    "Second opinions": (STANDING,),
    "Master scale": (STANDING,),
    "Cautions": (STANDING,),
    "How to verify and re-run this memo": (MEMO,),
}
"""The sheets behind each heading of the memo's outline, the nearest first."""
