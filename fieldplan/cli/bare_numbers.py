"""Bare numbers as a campaign without files: the same questions, keys and checks as in a file."""

import json
import tomllib
from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from fieldplan.cli.bare_composites import composites_of_numbers, with_splits
from fieldplan.cli.size_options import BadOption
from fieldplan.cli.typed_numbers import BareNumbers

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
    from fieldplan.sizing.campaign_question import ask
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
    spread = None
    if known:
        spread = with_splits(campaign, with_visits(campaign, _spread(numbers, parts)))
        if numbers.question in ABOUT_MEANS:
            question = replace(question, parts=as_visits(question.parts, spread.strata))
        question, campaign, spread = composites_of_numbers(question, campaign, spread)
    return Asked(campaign, objective, question, None, spread, numbers.area, sigma_known=known)


def _campaign(numbers: BareNumbers, parts: "tuple[Part, ...]") -> "Campaign":
    """Build the campaign that the numbers would make, with the keys of ``--with`` in it."""
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
    data: dict[str, Any] = {
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
    for text in numbers.with_keys:
        _place(data, objective, text)
    return _checked(data)


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


def _place(data: dict[str, Any], objective: dict[str, Any], text: str) -> None:
    """Put ``key=value`` where a campaign file has it."""
    from fieldplan.campaign.questions import MODULES, table_of

    key, equals, value = (piece.strip() for piece in text.partition("="))
    if not (equals and key and value):
        message = f"--with {text!r}: write a key and its value, such as share=0.05."
        raise BadOption(message)
    path = key.split(".")
    if path[0] == "sigma" and path[1:] in (["sampling"], ["analysis"]):
        data["sigma"].append({"part": path[1], "value": _value(value), "source": "typed"})
        return
    if path[0] == "sigma" and len(path) == 2 and len(data["sigma"]) > 1:
        for entry in data["sigma"]:  # typed once, for every stratum
            entry.setdefault(path[1], _value(value))
        return
    own = table_of(objective["question"])
    tables = {table_of(question) for question in MODULES}
    if len(path) == 1 and own in tables:
        path = [own, *path]
    elif len(path) == 1:
        message = (
            f"--with {text!r}: of which table is {key}? Write the table before it, such as "
            "cost.per_location=28."
        )
        raise BadOption(message)
    here: Any = objective if path[0] in tables else data
    for step in path[:-1]:
        if isinstance(here, dict):
            here = here.setdefault(step, [{}] if here is data and _repeats(step) else {})
        here = here[0] if isinstance(here, list) else here
    if not isinstance(here, dict):
        message = f"--with {text!r}: {'.'.join(path[:-1])} is no table."
        raise BadOption(message)
    here[path[-1]] = _value(value)


def _repeats(table: str) -> bool:
    """Tell whether a campaign file may have several tables of a name."""
    from fieldplan.campaign.model import Campaign
    from fieldplan.campaign.shape import shapes

    shape = shapes(Campaign).get(table)
    return shape is not None and shape.kind == "tables"


def _value(text: str) -> Any:
    """Read a value as a campaign file would; a bare word is taken as text."""
    try:
        return tomllib.loads(f"value = {text}")["value"]
    except tomllib.TOMLDecodeError:
        return text


def _checked(data: dict[str, Any]) -> "Campaign":
    """Run the checks of a campaign file; each problem is one line with the key's name."""
    from fieldplan.campaign.checks import check
    from fieldplan.campaign.problems import key_name
    from fieldplan.campaign.read import validated
    from fieldplan.campaign.references import resolve
    from fieldplan.campaign.screen import screen

    screened = screen(json.loads(json.dumps(data)))
    problems = [*screened.problems, *resolve(screened.data)]
    problems += [p for p in check(screened.data) if p.path[0] != "frame"]
    campaign, faults = validated(screened, problems)
    told = [f"{key_name(p.path, screened.data)}: {p.text}" for p in (*problems, *faults)]
    if told or campaign is None:
        raise BadOption("\n".join(dict.fromkeys(told)))
    return campaign


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
