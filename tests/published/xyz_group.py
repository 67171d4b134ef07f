"""The balance sheet of the XYZ Group, the illustrative statements in the Implementation Guidance to IAS 1.

In thousands. Read in two public study texts that quote it; property, plant and equipment is the printed subtotal less
the other lines.
"""

BALANCE = {  # 20X6 | 20X7, taken as 2016 and 2017
    "property_plant_equipment": (360_020, 350_700),
    "goodwill": (91_200, 80_800),
    "other_intangibles": (227_470, 227_470),
    "associates": (110_770, 100_150),
    "long_term_investments": (156_000, 142_500),
    "inventories": (132_500, 135_230),
    "trade_receivables": (110_800, 91_600),
    "other_current_assets": (12_540, 25_650),
    "cash": (322_900, 312_400),
    "share_capital": (600_000, 650_000),
    "retained_earnings": (161_700, 243_500),
    "other_reserves": (21_200, 10_200),
    "non_controlling_interests": (48_600, 70_050),
    "long_term_debt": (160_000, 120_000),
    "deferred_tax_liabilities": (26_040, 28_800),
    "provisions_non_current": (52_240, 28_850),
    "trade_payables": (187_620, 115_100),
    "short_term_debt": (200_000, 150_000),
    "current_portion_long_term_debt": (20_000, 10_000),
    "tax_payable": (42_000, 35_000),
    "provisions_current": (4_800, 5_000),
}
