"""What the n of the deciding objective buys for the other objectives and analytes."""

from collections.abc import Iterator, Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

from fieldplan.campaign.model import Objective
from fieldplan.sizing.asking import NO_TARGET
from fieldplan.sizing.campaign_question import ask, expected_mean, parts_of, target_of
from fieldplan.sizing.counting import BACK
from fieldplan.sizing.model import OtherPrecision, Size
from fieldplan.sizing.other_questions import other_question
from fieldplan.sizing.other_words import other_sentence
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.question import Question
from fieldplan.sizing.words import target_words
from fieldplan.stats.allocation import share_total
from fieldplan.stats.precision import meets, smallest

if TYPE_CHECKING:
    from fieldplan.campaign.model import Analyte, Campaign
    from fieldplan.frame.model import Frame
    from fieldplan.lab.model import Spread


def other_precisions(
    campaign: "Campaign",
    spread: "Spread",
    frame: "Frame",
    *,
    asked: Question,
    size: Size,
) -> tuple[OtherPrecision, ...]:
    """Say what the chosen n buys for every objective and analyte that does not decide it.

    Parameters
    ----------
    campaign : Campaign
    spread : Spread
        ``others`` holds the sigmas of analytes that do not decide n.
    frame : Frame
    asked : Question
        The deciding objective as a question.
    size : Size
        The answer to it.

    Returns
    -------
    tuple of OtherPrecision
        The other objectives in the order of the file, then analytes without an objective.

    Notes
    -----
    Neyman counts follow the luck of the deciding analyte's pilot. Another analyte of the same
    pilot may share that luck, in part or in full, so the factor for it is applied as if in full,
    which is on the careful side. With a pilot of its own there is nothing to share and no factor.
    """
    found = []
    for analyte, objective in _besides(campaign):
        if objective is not None and objective.question != "mean":
            found.append(other_question(campaign, spread, frame, objective=objective, size=size))
            continue
        known = _Known(campaign, spread, frame, analyte=analyte)
        found.append(_answered(campaign, size, asked=asked, objective=objective, known=known))
    return tuple(found)


def _besides(campaign: "Campaign") -> Iterator[tuple["Analyte", "Objective | None"]]:
    """Pair analytes with objectives that do not decide n; None for those that nothing asks of."""
    deciding = campaign.deciding_objective
    asked = {campaign.deciding_analyte.id}
    for objective in campaign.objective:
        if objective is not deciding:
            analyte = campaign.analyte_called(objective.analyte or campaign.deciding_analyte.id)
            asked.add(analyte.id)
            yield analyte, objective
    for analyte in campaign.analyte:
        if analyte.id not in asked:
            yield analyte, None


class _Known:
    """What the campaign knows of one analyte's spread; ``parts`` is empty where that is too little.

    ``given`` says whether the campaign file has a ``[[sigma]]`` for it at all.
    """

    def __init__(
        self, campaign: "Campaign", spread: "Spread", frame: "Frame", *, analyte: "Analyte"
    ) -> None:
        deciding = analyte.id == spread.analyte
        own = tuple(entry for entry in spread.others if entry.analyte == analyte.id)
        entries = spread.strata if deciding else own
        complete = {stratum.name for stratum in frame.strata} <= {e.stratum for e in entries}
        self.analyte = analyte
        self.parts = parts_of(campaign, frame, entries) if complete else ()
        self.mean = expected_mean(entries, frame, site=spread.site if deciding else None)
        self.given = any(sigma.analyte == analyte.id for sigma in campaign.sigma)


def _answered(
    campaign: "Campaign",
    size: Size,
    *,
    asked: Question,
    objective: "Objective | None",
    known: _Known,
) -> OtherPrecision:
    widened = campaign.rules.mean_interval == "skew-widened"
    why_not = _why_no_target(objective, known.mean, widened=widened)
    own = NO_TARGET if objective is None or why_not else objective
    own = own.model_copy(update={"analyte": known.analyte.id})
    question = ask(campaign, own, parts=known.parts, mean=known.mean)
    found = OtherPrecision(known.analyte.id, known.analyte.unit)
    if not why_not:
        found = replace(
            found,
            target=target_words(question),
            target_standard_error=question.target_standard_error,
            target_half_width=question.target_half_width,
            assurance=question.assurance,
        )
    found = _bought(question, found, size=size, asked=asked)
    words = other_sentence(
        found, size, name=known.analyte.label, given=known.given, why_not=why_not
    )
    return replace(found, sentence=words)


def _why_no_target(objective: "Objective | None", mean: float | None, *, widened: bool) -> str:
    """Say why there is no precision to compare with; empty where there is one."""
    if objective is None:
        return "the campaign sets no target for it"
    kind = target_of(objective)[0]
    if kind == "budget":
        return "its own objective is a budget, which sets no precision"
    if kind == "relative_half_width" and not (mean or 0.0) > 0:
        return "its own target is a share of an expected mean that the campaign does not give"
    if kind == "half_width" and widened and not (mean or 0.0) > 0:
        return "the interval that the rules fix depends on a mean that the campaign does not give"
    return ""


def _bought(
    question: Question, found: OtherPrecision, *, size: Size, asked: Question
) -> OtherPrecision:
    """Fill in what the counts of ``size`` buy, and whether that keeps the target."""
    if question.census:
        kept = True if found.target else None
        return replace(found, standard_error=0.0, half_width=0.0, meets=kept)
    if not question.parts:
        return found
    counts = [entry.needed for entry in size.strata]
    decides = question.analyte in {other.analyte for other in asked.also}
    common = decides or _shares_pilot(question, asked)
    precision = Precision(question if common else replace(question, allocation="proportional"))
    error, width = precision.standard_error(counts), _width(precision, counts)
    assumed = any(part.assumed for part in question.parts)
    found = replace(found, standard_error=error, half_width=width, assumed=assumed)
    if not found.target:
        return found
    kept, chance = _keeps(found, precision, counts), precision.chance(counts)
    found = replace(found, meets=kept, chance=chance)
    return replace(found, enough_n=_enough(found, precision, asked)) if found.falls_short else found


def _width(precision: Precision, counts: Sequence[int]) -> float | None:
    """Give the half-width; None where it depends on a mean that nobody gave."""
    question = precision.question
    known = (question.parts[0].mean or question.mean or 0.0) > 0
    return precision.half_width(counts) if known or not question.widened else None


def _shares_pilot(question: Question, asked: Question) -> bool:
    """Whether a sigma has the same source as the deciding one's, and may share its luck."""
    pairs = zip(question.parts, asked.parts, strict=True)
    return any(one.source == other.source for one, other in pairs)


def _enough(found: OtherPrecision, precision: Precision, asked: Question) -> int | None:
    """Count the results, shared out as for the deciding objective, that keep the target.

    None where no number does.
    """
    strata = asked.sharing

    def fits(total: int) -> bool:
        counts = share_total(strata, total, allocation=asked.allocation)
        judged = replace(found, meets=_keeps(found, precision, counts))
        if found.chance is not None:
            judged = replace(judged, chance=precision.chance(counts))
        return not judged.falls_short

    low = sum(strata.floors)
    total = smallest(fits, low, strata.most, back=min(2 * len(asked.parts) + 1, BACK))
    return total if fits(total) else None


def _keeps(found: OtherPrecision, precision: Precision, counts: Sequence[int]) -> bool:
    """Whether these counts keep the target with sigma at face value."""
    if found.target_half_width is not None:
        return meets(precision.half_width(counts), found.target_half_width)
    return meets(precision.standard_error(counts), found.target_standard_error or 0.0)
