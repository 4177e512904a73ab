"""Bare numbers as a campaign without files: the same questions, keys and checks as in a file."""

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any, get_args

from fieldplan.cli.bare_checks import checked
from fieldplan.cli.bare_composites import composites_of_numbers, with_splits
from fieldplan.cli.question_keys import needed_keys
from fieldplan.cli.size_options import BadOption
from fieldplan.cli.typed_numbers import BareNumbers
from fieldplan.cli.with_keys import place

if TYPE_CHECKING:
    from fieldplan.campaign.model import Campaign
    from fieldplan.lab.model import Spread
    from fieldplan.sizing.asked.model import Asked
    from fieldplan.sizing.question import Part

ANALYTE = "analyte"


def asked_of_numbers(typed: Mapping[str, Any]) -> "Asked":
    """Turn typed options into all that a question may look at.

    Parameters
    ----------
    typed : mapping
        The options of ``fieldplan size``.

    Returns
    -------
    Asked
        ``frame`` is None.

    Raises
    ------
    BadOption
        Options that do not belong together, one line each.
    """
    from dataclasses import replace

    from fieldplan.campaign.questions import WITHOUT_SIGMA
    from fieldplan.lab.visits import with_visits
    from fieldplan.sizing.asked.model import Asked
    from fieldplan.sizing.asking import NO_TARGET
    from fieldplan.sizing.campaign_question import ask, with_losses
    from fieldplan.sizing.visits import ABOUT_MEANS, as_visits

    numbers = BareNumbers(**typed)
    numbers.check_question()
    parts = numbers.parts()
    campaign = _campaign(numbers, parts)
    objective = campaign.objective[0]
    known = all(part.sigma > 0 for part in parts)
    if numbers.question != "mean" and not known and numbers.question not in WITHOUT_SIGMA:
        message = f"--question {numbers.question} needs --sigma, or a --stratum for each part."
        raise BadOption(message)
    if numbers.question == "mean":
        question = numbers.as_question(campaign)
    else:
        question = ask(campaign, NO_TARGET, parts=parts, mean=numbers.mean)
        question = replace(question, assurance=None, analyte="", unit=numbers.unit or "")
    question = replace(question, parts=with_losses(question.parts, campaign.loss))
    spread = None
    if known:
        spread = with_splits(campaign, with_visits(campaign, _spread(numbers, parts)))
        if numbers.question in ABOUT_MEANS:
            question = replace(question, parts=as_visits(question.parts, spread.strata))
        question, campaign, spread = composites_of_numbers(question, campaign, spread)
    return Asked(campaign, objective, question, None, spread, numbers.area, sigma_known=known)


def _campaign(numbers: BareNumbers, parts: "tuple[Part, ...]") -> "Campaign":
    """Build the campaign that the numbers would make, with the keys of ``--with`` in it."""
    from fieldplan.campaign.questions import table_of

    data = _tables(numbers, parts)
    (objective,) = data["objective"]
    for text in numbers.with_keys:
        place(data, text, numbers.question)
    if numbers.question != "mean" and table_of(numbers.question) not in objective:
        given = [name for name, value in vars(numbers).items() if value]
        given += ["sigma"] if numbers.stratum else []
        raise BadOption(needed_keys(numbers.question, given))
    _own_confidence(objective, numbers.confidence)
    return checked(data, numbers.question)


def _tables(numbers: BareNumbers, parts: "tuple[Part, ...]") -> dict[str, Any]:
    """Write the tables of a campaign file that the options make by themselves."""
    objective: dict[str, Any] = {"question": numbers.question}
    if numbers.question == "mean":
        kind, value = numbers.target()
        objective |= {kind: value}
        if kind != "budget":
            objective["assurance"] = numbers.assurance or "plain"
    analyte: dict[str, Any] = {"id": ANALYTE, "unit": numbers.unit or "units"}
    if numbers.level is not None:
        analyte |= {"action_level": numbers.level, "action_level_source": "typed"}
    several = len(parts) > 1
    return {
        "format": 1,
        "plan": {"id": "numbers", "title": "Bare numbers"},
        "analyte": [analyte],
        "frame": [_frame(numbers, several=several)],
        "design": [
            {
                "layout": numbers.layout or ("stratified" if several else "simple-random"),
                "allocation": numbers.allocation or "proportional",
                "floor": numbers.floor or 2,
            }
        ],
        "objective": [objective],
        "sigma": [_sigma(part, several=several) for part in parts if part.sigma > 0],
        "rules": {
            "confidence": numbers.confidence or 0.95,
            "interval": "upper-limit" if numbers.one_sided else "two-sided",
        },
        "draw": {"seed": 0},
    }


def _own_confidence(objective: dict[str, Any], confidence: float | None) -> None:
    """Let ``--confidence`` set the key of a question that has one; refuse two that differ."""
    from fieldplan.campaign.model import Objective
    from fieldplan.campaign.questions import table_of

    name = table_of(objective["question"])
    kind = Objective.model_fields.get(name)
    tables = [] if kind is None else [t for t in get_args(kind.annotation) if t is not type(None)]
    if confidence is None or not any("confidence" in table.model_fields for table in tables):
        return
    own = objective.setdefault(name, {})
    if isinstance(own, dict) and own.setdefault("confidence", confidence) != confidence:
        message = (
            f"--confidence {confidence:g} and --with confidence={own['confidence']}: both set "
            f"objective.{name}.confidence; keep one."
        )
        raise BadOption(message)


def _frame(numbers: BareNumbers, *, several: bool) -> dict[str, Any]:
    if numbers.population is not None:
        return {"kind": "list", "list_file": "typed"}
    return {"kind": "area"} | ({"strata": "typed"} if several else {})


def _sigma(part: "Part", *, several: bool) -> dict[str, Any]:
    entry: dict[str, Any] = {"value": part.sigma, "source": "typed"}
    if part.results is not None:
        entry["from_results"] = part.results
    if part.mean is not None:
        entry["expected_mean"] = part.mean
    if part.skewness is not None:
        entry["skewness"] = part.skewness
    if part.excess_kurtosis is not None:
        entry["excess_kurtosis"] = part.excess_kurtosis
    return entry | ({"stratum": part.name} if several else {})


def _spread(numbers: BareNumbers, parts: "tuple[Part, ...]") -> "Spread":
    from fieldplan.lab.model import Spread, StratumSpread

    strata = tuple(
        StratumSpread(
            ANALYTE, part.name, part.sigma, part.mean, part.results, "typed",
            skewness=part.skewness, excess_kurtosis=part.excess_kurtosis,
        )
        for part in parts
    )  # fmt: skip
    site = strata[0] if len(strata) == 1 else None
    return Spread(ANALYTE, numbers.unit or "", strata, site)
