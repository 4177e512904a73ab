"""What a typed target means: n, what it yields, and the chance that it is enough."""

from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

from fieldplan.base.errors import FieldplanError
from fieldplan.campaign.answers import Answers
from fieldplan.cli.named_files import first_problems, known_campaign, pilot_spread

if TYPE_CHECKING:
    from fieldplan.campaign.model import ReadCampaign
    from fieldplan.frame.model import Frame
    from fieldplan.sizing.question import Part, Question

CONFIDENCE = 0.95
UNIT_OPEN = "(unit not known yet)"


def echo_target(answers: Answers, folder: Path, *, drawn: bool = True) -> list[str]:
    """Say in sentences what a target asks for, as ``fieldplan size`` will.

    Parameters
    ----------
    answers : Answers
        With a target; sigma or a pilot as far as known.
    folder : Path
        Where the paths of the answers start.
    drawn : bool
        Whether the boundary is a file already; strata can be measured only then.

    Returns
    -------
    list of str
        Empty without a target.
    """
    if answers.target_kind is None or answers.target is None:
        return []
    if answers.target_kind == "budget":
        return ["'fieldplan size' will say how far off the mean is for that money."]
    if answers.pilot is None and answers.sigma is None:
        return _without_sigma(answers)
    if answers.target_kind == "relative_half_width" and not _mean_is_known(answers):
        return ["A share of the mean needs a mean; add expected_mean to the file."]
    if answers.pilot is not None and (answers.analyte is None or answers.unit is None):
        return ["The number of results can be said once analyte and unit are known."]
    try:
        return _with_sigma(answers, folder, drawn)
    except FieldplanError as fault:
        return ["The number of results cannot be said yet:", *first_problems(fault)]


def _mean_is_known(answers: Answers) -> bool:
    return answers.pilot is not None or answers.expected_mean is not None


def _without_sigma(answers: Answers) -> list[str]:
    """Relate half-width and standard error while sigma is not known."""
    target, unit = answers.target or 0.0, answers.unit or UNIT_OPEN
    later = "How many results that takes depends on sigma, which is not known yet."
    if answers.target_kind == "relative_half_width":
        return [
            f"The interval shall reach {target * 100:.3g} % of the mean to either side. {later}"
        ]
    if answers.target_kind == "standard_error":
        other = f"a half-width of about {2 * target:.3g} {unit}"
    else:
        other = f"a standard error of about {target / 2:.3g} {unit}"
    return [
        f"From about 30 results on that is {other} ({CONFIDENCE * 100:.0f} % interval). {later}"
    ]


def _with_sigma(answers: Answers, folder: Path, drawn: bool) -> list[str]:
    """Ask sizing the question that the campaign file will ask, with sigma at face value first."""
    from fieldplan.sizing import answer

    question = _question(replace(answers, assurance="plain", chosen_by=None), folder, drawn)
    sentences = answer(question).sentences[:3]
    chosen = answers.assurance
    if isinstance(chosen, float) and not answers.guessed_without_results:
        n = answer(replace(question, assurance=chosen)).needed
        sentences = (*sentences, f"For the chance of {chosen * 100:g} % asked for it takes {n}.")
    return [_taken_from(answers, question), *sentences]


def _taken_from(answers: Answers, question: "Question") -> str:
    """Say which standard deviation the number rests on."""
    whose = "the pilot's" if answers.pilot is not None else "a"
    unit = answers.unit or UNIT_OPEN
    if len(question.parts) == 1:
        return f"With {whose} standard deviation of {question.parts[0].sigma:.4g} {unit}:"
    sigmas = ", ".join(f"{part.name} {part.sigma:.4g}" for part in question.parts)
    return f"With {whose} standard deviation in each stratum ({sigmas} {unit}):"


def _question(answers: Answers, folder: Path, drawn: bool) -> "Question":
    """Put the question; a list or strata are read, since they change the number."""
    from fieldplan.sizing.campaign_question import ask, expected_mean, parts_of

    read = known_campaign(answers, folder)
    if read is None:
        message = "the answers do not make a campaign yet."
        raise FieldplanError(message)
    campaign = read.campaign
    if answers.list_file is not None or (answers.strata is not None and drawn):
        from fieldplan.frame import read_frame
        from fieldplan.lab import read_spread

        frame: Frame = read_frame(read)
        spread = read_spread(read, frame)
        parts = parts_of(campaign, frame, spread.strata)
        mean = expected_mean(spread.strata, frame, site=spread.site)
    else:
        part = _whole_site(answers, read)
        parts, mean = (part,), part.mean
    question = ask(campaign, campaign.deciding_objective, parts=parts, mean=mean)
    return replace(question, unit=answers.unit or UNIT_OPEN)


def _whole_site(answers: Answers, read: "ReadCampaign") -> "Part":
    """Take the site as one part, which needs no boundary."""
    from fieldplan.sizing.question import Part

    if answers.pilot is None:
        source = (answers.sigma_source or "").strip()
        return Part(
            name="site",
            weight=1.0,
            sigma=answers.sigma or 0.0,
            results=answers.from_results,
            source=source,
            assumed=source.casefold() == "assumed",
            mean=answers.expected_mean,
            mean_from=source,
        )
    pilot = pilot_spread(read)
    return Part(
        name="site",
        weight=1.0,
        sigma=pilot.sigma,
        results=pilot.results,
        source=pilot.source,
        skewness=pilot.skewness,
        mean=pilot.mean,
        mean_from=pilot.source,
    )
