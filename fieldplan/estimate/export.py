"""The estimates as plain values for other programs: one JSON object, one CSV row a location."""

import csv
import io
import math
from collections.abc import Iterator
from dataclasses import asdict, replace
from typing import Any

from fieldplan.estimate.model import Answers, Estimate
from fieldplan.plan.model import Plan
from fieldplan.returns.form import as_text
from fieldplan.returns.model import LocationResult, Returns

RESULT_COLUMNS = (
    "location_id", "short_name", "class", "stratum", "analyte", "sample_ids", "as_reported",
    "result_low", "result_half", "result_high", "unit", "detected", "used", "why_not", "latitude",
    "longitude", "actual_latitude", "actual_longitude", "moved_m", "stands_in_for",
)  # fmt: skip


def estimate_json(estimate: Estimate) -> dict[str, Any]:
    """Turn an estimate into plain JSON values.

    Parameters
    ----------
    estimate : Estimate

    Returns
    -------
    dict
        Numbers unrounded. Infinite degrees of freedom (a census) become null, since JSON has no
        word for them.
    """
    mean = estimate.mean
    content = {
        "analyte": estimate.analyte,
        "unit": estimate.unit,
        "n": mean.n,
        "mean": mean.mean,
        "standard_error": mean.standard_error,
        "degrees_of_freedom": mean.degrees_of_freedom,
        "interval": asdict(estimate.interval),
        "other_interval": asdict(estimate.other_interval),
        "non_detects_as_bounds": estimate.as_bounds,
        "mean_is_upper_bound": estimate.upper_bound,
        "non_detects": estimate.non_detect_sentence,
        "bracket": asdict(estimate.bracket) if estimate.bracket else None,
        "strata": [asdict(stratum) for stratum in mean.strata],
        "method": mean.method,
        "caution": mean.caution,
        "planned_standard_error": estimate.planned_standard_error,
        "achieved_standard_error": estimate.achieved_standard_error,
        "why_different": estimate.why_different,
        "level": estimate.level_sentence,
        "population": estimate.population_sentence,
        "coverage": estimate.coverage_sentence,
        "changes_after_results": [asdict(change) for change in estimate.changes],
        "sentences": estimate.sentences,
        "steps": [asdict(step) for step in estimate.steps],
        "rejected": estimate.rejected_sentence,
        "standing": estimate.standing_sentence,
        "interval_rule": estimate.interval_sentence,
        "returns": asdict(replace(estimate.returns, with_rejected=None)),
    }
    plain: dict[str, Any] = _plain(content)
    return plain


def answers_json(answers: Answers) -> dict[str, Any]:
    """Turn the answers for every analyte into plain JSON values.

    Parameters
    ----------
    answers : Answers

    Returns
    -------
    dict
        As ``estimate_json`` for the main analyte; ``others`` lists the same for each other one,
        ``without_mean`` names those that get none, with the reason.
    """
    return {
        **estimate_json(answers.main),
        "others": [estimate_json(other) for other in answers.others],
        "other_sentences": list(answers.sentences),
        "without_mean": [
            {"analyte": entry.analyte, "sentence": entry.sentence} for entry in answers.without
        ],
    }


def _plain(thing: Any) -> Any:
    if isinstance(thing, dict):
        return {key: _plain(value) for key, value in thing.items()}
    if isinstance(thing, list | tuple):
        return [_plain(value) for value in thing]
    if isinstance(thing, float) and not math.isfinite(thing):
        return None
    return thing


def answers_csv(answers: Answers, plan: Plan) -> str:
    """Write one row for every analyte and every location with a result or lost.

    Parameters
    ----------
    answers : Answers
    plan : Plan
        Gives the order and the short names.

    Returns
    -------
    str
        CSV with CRLF line ends: the main analyte first, locations in the plan's order. Results
        of an analyte that gets no mean are there too.
    """
    refused = [entry.returns for entry in answers.without if entry.returns is not None]
    text = io.StringIO(newline="")
    writer = csv.writer(text)
    writer.writerow(RESULT_COLUMNS)
    for returns in (answers.main.returns, *(o.returns for o in answers.others), *refused):
        writer.writerows(_rows(returns, plan))
    return text.getvalue()


def _rows(returns: Returns, plan: Plan) -> Iterator[list[str]]:
    """Yield the rows of one analyte."""
    results = {result.location_id: result for result in returns.results}
    lost = {entry.location_id: entry for entry in returns.lost}
    unit = plan.campaign.analyte_called(returns.analyte).unit
    for place in plan.locations.places:
        head = [place.location_id, place.short_name, place.location_class, place.stratum]
        spot = [f"{place.latitude:.7f}", f"{place.longitude:.7f}"]
        if place.location_id in results:
            cells = _result_cells(results[place.location_id], unit, spot)
        elif place.location_id in lost:
            entry = lost[place.location_id]
            why = f"lost: {entry.reason}"
            why += f"; replaced by {entry.replaced_by}" if entry.replaced_by else ""
            cells = ["", "", "", "", "", "", "", "no", why, *spot, "", "", "", ""]
        else:
            continue
        named = [as_text(cell) for cell in (*head, returns.analyte)]
        yield named + [_inert(cell) for cell in cells]


def _result_cells(result: LocationResult, unit: str, spot: list[str]) -> list[str]:
    def number(value: float | None, form: str) -> str:
        return "" if value is None else format(value, form)

    return [
        " ".join(result.sample_ids),
        "; ".join(result.as_reported),
        *(f"{value:.10g}" for value in (result.low, result.half, result.high)),
        unit,
        "yes" if result.detected else "no",
        "yes" if result.used else "no",
        result.why_not,
        *spot,
        number(result.actual_latitude, ".7f"),
        number(result.actual_longitude, ".7f"),
        number(result.moved_m, ".1f"),
        result.stands_in_for,
    ]


def _inert(cell: str) -> str:
    """Put an apostrophe before a text that a spreadsheet would run; numbers stay."""
    try:
        float(cell)
    except ValueError:
        return f"'{cell}" if cell.lstrip()[:1] in {"=", "+", "-", "@"} and cell else cell
    return cell
