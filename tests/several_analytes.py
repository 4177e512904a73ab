"""Lead, which decides n, and zinc in the same jars: parts for tests, built by hand."""

from collections.abc import Mapping
from dataclasses import replace

from fieldplan.campaign.model import Analyte, Campaign, Objective
from fieldplan.lab.model import Spread, StratumSpread
from fieldplan.plan.model import Plan
from fieldplan.samples.model import Samples
from fieldplan.sizing.model import OtherPrecision
from tests.factories import make_campaign, make_plan, make_samples, make_size, make_spread

ZINC = Analyte(
    id="zinc",
    name="Zinc",
    unit="µg/g",
    matrix="soil",
    reporting_limit=10.0,
    action_level=300.0,
    action_level_source="invented local guideline, 2024",
)
"""In a unit of its own, so that a page which takes lead's is found out."""

ZINC_SIGMAS = {"meadow": 30.0, "yard": 40.0}


def zinc_objective(**target: object) -> Objective:
    """Ask for the mean of zinc, with an assurance of 80 % unless told otherwise."""
    asked: dict[str, object] = {
        "design": "main",
        "analyte": "zinc",
        "question": "mean",
        "assurance": 0.80,
        **target,
    }
    return Objective(**asked)  # type: ignore[arg-type]


def campaign_with_zinc(*objectives: Objective, **changes: object) -> Campaign:
    """Lead decides n; these objectives stand beside it."""
    lead = make_campaign().objective[0].model_copy(update={"decides_n": True})
    parts: dict[str, object] = {
        "analyte": (*make_campaign().analyte, ZINC),
        "objective": (lead, *objectives),
        **changes,
    }
    return make_campaign(**parts)


def spread_with_zinc(
    sigmas: Mapping[str, float] = ZINC_SIGMAS, *, results: int | None = 8, assumed: bool = False
) -> Spread:
    """Sigmas of zinc beside those of lead, each from a pilot of its own."""
    others = tuple(
        StratumSpread("zinc", name, sigma, 120.0, results, f"{name}.csv", assumed=assumed)
        for name, sigma in sigmas.items()
    )
    return replace(make_spread(), others=others)


def samples_for_both() -> Samples:
    """Give every jar to both analytes."""
    jars = (replace(sample, analytes=("lead", "zinc")) for sample in make_samples().samples)
    return Samples(tuple(jars))


def plan_with_zinc(*, known: bool = True) -> Plan:
    """A plan of both; zinc's precision is 13.61 by hand, or unknown.

    √((0.711864·30)²/3 + (0.288136·40)²/4) = √(152.03 + 33.21) = 13.61.
    """
    planned = OtherPrecision(
        "zinc",
        "µg/g",
        target="standard error of the mean ≤ 15 µg/g" if known else "",
        target_standard_error=15.0 if known else None,
        standard_error=13.61 if known else None,
        half_width=31.0 if known else None,
        meets=True if known else None,
        chance=0.62 if known else None,
        assurance=0.80 if known else None,
        enough_n=11 if known else None,
        sentence="Zinc: a sentence of its own.",
    )
    return make_plan(
        campaign=campaign_with_zinc(zinc_objective(standard_error=15.0)),
        spread=spread_with_zinc() if known else make_spread(),
        size=replace(make_size(), others=(planned,)),
        samples=samples_for_both(),
    )
