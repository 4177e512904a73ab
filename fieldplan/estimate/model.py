"""What the results say, by the recorded design and rules."""

from dataclasses import dataclass

from fieldplan.base.working import Step
from fieldplan.design.model import MeanEstimate
from fieldplan.returns.model import Returns


@dataclass(frozen=True)
class Interval:
    """An interval or a limit for the mean; the open end of a limit is None."""

    kind: str
    confidence: float
    low: float | None
    high: float | None


@dataclass(frozen=True)
class Bracket:
    """The whole answer with non-detects at 0, half and the limit."""

    mean_low: float
    mean_half: float
    mean_high: float
    interval_low: Interval
    interval_half: Interval
    interval_high: Interval


@dataclass(frozen=True)
class Change:
    """A rule overridden after results were seen: both answers, printed as such.

    Where the recorded rule gives no answer, ``interval_recorded`` and ``mean_recorded`` are None
    and ``refusal_recorded`` says why.
    """

    rule: str
    recorded: str
    used: str
    interval_recorded: Interval | None
    mean_recorded: float | None
    refusal_recorded: str = ""


@dataclass(frozen=True)
class Estimate:
    """The site mean, how well it is known, and whether the campaign kept its promise.

    Parameters
    ----------
    analyte, unit : str
    mean : MeanEstimate
        With non-detects at half their limit when there are any; ``bracket`` has the bounds.
    interval : Interval
        As declared before results.
    other_interval : Interval
        The other kind, shown on request.
    bracket : Bracket or None
        None when everything was detected.
    planned_standard_error : float or None
        None where the campaign had no sigma for the analyte.
    achieved_standard_error : float
    why_different : tuple of str
        Sentences that split the difference into n, spread and weights.
    level_sentence : str
        The interval against the action level; empty without a level.
    population_sentence : str
        What the mean speaks for after losses.
    coverage_sentence : str
        What this kind of interval delivers at this n and skewness.
    steps : tuple of Step
    changes : tuple of Change
        Empty when nothing was changed after results.
    returns : Returns
    as_bounds : bool
        Whether the answers at 0, half and the limit stand for each other; else a method for
        non-detects, or half by declaration, is the answer and the bracket stands beside it.
    non_detect_sentence : str
        What was done with non-detects where they are no bounds, or why they are; may be empty.
    upper_bound : bool
        The mean is the largest that non-detects leave open, and no estimate.
    sentences : tuple of str
        The answer in words, most important first.
    rejected_sentence : str
        What the laboratory rejected and the answer with it; empty without such results.
    standing_sentence : str
        Why the record does not show that the plan stood before the results; empty where it may.
    interval_sentence : str
        What the interval is promised for and what speaks against it; empty for Student's t.
    """

    analyte: str
    unit: str
    mean: MeanEstimate
    interval: Interval
    other_interval: Interval
    bracket: Bracket | None
    planned_standard_error: float | None
    achieved_standard_error: float
    why_different: tuple[str, ...]
    level_sentence: str
    population_sentence: str
    coverage_sentence: str
    steps: tuple[Step, ...]
    changes: tuple[Change, ...]
    returns: Returns
    sentences: tuple[str, ...]
    rejected_sentence: str = ""
    standing_sentence: str = ""
    interval_sentence: str = ""
    as_bounds: bool = True
    non_detect_sentence: str = ""
    upper_bound: bool = False


@dataclass(frozen=True)
class Unanswered:
    """An analyte of the campaign that gets no mean, and why, in a sentence.

    ``returns`` is None where the laboratory file has no result of it at all.
    """

    analyte: str
    sentence: str
    returns: Returns | None = None


@dataclass(frozen=True)
class Answers:
    """What one laboratory file says of the campaign.

    Parameters
    ----------
    main : Estimate
        Of the deciding analyte, or of the one asked for.
    others : tuple of Estimate
        Of the campaign's other analytes, in the order of its file.
    without : tuple of Unanswered
        Analytes that get no mean.
    sentences : tuple of str
        One for each other analyte; two where a rule was changed after results.
    """

    main: Estimate
    others: tuple[Estimate, ...] = ()
    without: tuple[Unanswered, ...] = ()
    sentences: tuple[str, ...] = ()
