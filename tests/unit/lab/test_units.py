"""Units: spellings brought together, exact factors, no silent guess."""

from decimal import Decimal

import pytest

from fieldplan.lab.units import conversion_factor, plain_basis, plain_unit, split_basis


@pytest.mark.parametrize(
    "text",
    ["ug/L", "µg/L", "μg/l", "Âµg/L", "Î¼g/L", "UG/L", "mcg/L", "ug / l", "µg·L⁻¹", "ug L-1",
     "µg per L", " µg/L "],
)  # fmt: skip
def test_all_spellings_of_microgram_per_litre_are_one(text: str) -> None:
    """µ, u and its two mojibake forms mean the same; a factor of 1000 must not hang on a font."""
    assert plain_unit(text) == "ug/l"


@pytest.mark.parametrize(
    ("unit", "wanted", "factor"),
    [
        ("mg/kg", "mg/kg", "1"),
        ("ug/kg", "mg/kg", "0.001"),
        ("g/kg", "mg/kg", "1000"),
        ("ug/g", "mg/kg", "1"),
        ("ng/L", "µg/L", "0.001"),
        ("mg/L", "ng/L", "1000000"),
        ("ug/mL", "mg/L", "1"),
        ("mg/m3", "ug/L", "1"),
        ("S.U.", "s.u.", "1"),
    ],
)
def test_factors_are_exact_powers_of_ten(unit: str, wanted: str, factor: str) -> None:
    """By definition of the SI prefixes; a litre is a cubic decimetre."""
    assert conversion_factor(unit, wanted) == Decimal(factor)


@pytest.mark.parametrize(
    ("unit", "wanted"),
    [("mg/L", "mg/kg"), ("ppm", "mg/kg"), ("%", "mg/kg"), ("mg/L as N", "mg/L"),
     ("mg/L as NO3", "mg/L as N"), ("mgkg", "mg/kg"), ("", "mg/kg")],
)  # fmt: skip
def test_what_needs_knowledge_beyond_the_unit_is_not_converted(unit: str, wanted: str) -> None:
    """Density, the meaning of ppm and the molecule counted are not in the unit."""
    assert conversion_factor(unit, wanted) is None


def test_a_basis_behind_the_unit_is_parted_from_it() -> None:
    """mg/kg dw is mg/kg on a dry basis."""
    assert split_basis("mg/kg (dry)") == ("mg/kg", "dry weight")
    assert split_basis("mg/kg ww") == ("mg/kg", "wet weight")
    assert plain_basis("D") == "dry weight"
