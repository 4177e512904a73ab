"""The rules for the estimate: in words, as recorded, who stated them, and with a fingerprint."""

import hashlib
from datetime import date

from fieldplan.base.document import Block, Facts, Paragraph, Table
from fieldplan.campaign.model import Rules
from fieldplan.packet.sheets.amounts import BLANK

NON_DETECTS = {
    "bounds": "non-detects are set to 0, to half and to their limit; the mean is shown for all "
    "three, with half in the middle",
    "substitute-half": "half the limit is put in place of a non-detect; what that is off by is not "
    "known",
    "kaplan-meier": "the mean is that of the product limit; where a limit lies below all detects, "
    "it is an upper bound",
    "order-statistics": "non-detects are filled in from a line through the ordered detects; the "
    "bounds at 0 and at the limit stand beside the mean",
    "lognormal-likelihood": "a lognormal shape is fitted by maximum likelihood; the bounds at 0 "
    "and at the limit stand beside the mean",
    "gamma-likelihood": "a gamma shape is fitted by maximum likelihood; the bounds at 0 and at the "
    "limit stand beside the mean",
    "normal-likelihood": "a normal shape is fitted by maximum likelihood; the bounds at 0 and at "
    "the limit stand beside the mean",
    "by-share": "a method is chosen by the share of non-detects, the number of results and the "
    "declared shape; the sheet says which and why",
}
SHAPES = {
    None: "none is relied on",
    "lognormal": "by-share may fit a lognormal shape",
    "gamma": "by-share may fit a gamma shape",
    "normal": "by-share may fit a normal shape",
}
DUPLICATES = {
    "average": "the results of one location are averaged; a duplicate is never a further n",
    "first": "the first sample of a location counts; its duplicate is for quality control only",
}
INTERVALS = {
    "two-sided": "an interval with two ends",
    "upper-limit": "one upper limit",
    "lower-limit": "one lower limit",
}
MEAN_INTERVALS = {
    "student-t": "its ends are set by Student's t",
    "skew-widened": "its ends are set wider for skewed results, so far as the class needs it",
}
CLASSES = {
    None: "none is needed for Student's t",
    "cv-up-to-1": "populations without zeros whose standard deviation is no larger than the mean, "
    "and without a separate high part that the results may miss",
    "cv-up-to-2": "populations with at most half zeros and a standard deviation up to twice the "
    "mean, and without a separate high part that the results may miss",
}
LONG_RUNS = {
    "student-t": "nominal: where the mean is near normal, this share of such intervals or limits "
    "holds the true mean in the long run",
    "skew-widened": "nominal: about this share of such intervals or limits holds the true mean in "
    "the long run, in every population of the promised class; the sheet says how closely at this n",
}
UNVERIFIED = (
    "Who fixed the rules, and when, is stated in the campaign file; this tool cannot verify it. "
    "Lodge the fingerprint with somebody outside before field work: whoever holds it can show that "
    "the rules are as they were then."
)
SINGLES = {
    "refuse": "a stratum left with fewer than 2 results yields no estimate",
    "borrow-spread": "a stratum left with 1 result borrows the pooled spread of the others, and "
    "the results sheet says so",
}


def rule_lines(rules: Rules) -> tuple[str, ...]:
    """Write the rules as ``key = value`` lines in the order of the alphabet.

    Examples
    --------
    >>> rule_lines(Rules())[0]
    'confidence = 0.95'
    """
    recorded = rules.model_dump(mode="json")
    return tuple(
        f"{key} = {'' if recorded[key] is None else recorded[key]}" for key in sorted(recorded)
    )


def rules_fingerprint(rules: Rules) -> str:
    """Shorten the SHA-256 of the rule lines to 16 characters; it changes with every rule.

    Parameters
    ----------
    rules : Rules

    Returns
    -------
    str
        The first 16 hexadecimal digits for the lines joined by line feeds, in UTF-8.
    """
    return hashlib.sha256("\n".join(rule_lines(rules)).encode()).hexdigest()[:16]


def _ends_set_by(rules: Rules) -> str:
    """Say how the ends are set, which a method for non-detects does by itself."""
    said = MEAN_INTERVALS[rules.mean_interval]
    if rules.non_detects in ("bounds", "substitute-half"):
        return said
    return f"{said}; with non-detects, by the method that stands for them"


def rules_table(rules: Rules) -> Table:
    """Set every rule with its recorded value and what it means."""
    return Table(
        columns=("Rule", "Recorded", "Meaning"),
        rows=(
            ("non_detects", rules.non_detects, NON_DETECTS[rules.non_detects]),
            ("declared_shape", rules.declared_shape or BLANK, SHAPES[rules.declared_shape]),
            ("duplicates", rules.duplicates, DUPLICATES[rules.duplicates]),
            ("interval", rules.interval, INTERVALS[rules.interval]),
            ("confidence", f"{rules.confidence:g}", LONG_RUNS[rules.mean_interval]),
            ("mean_interval", rules.mean_interval, _ends_set_by(rules)),
            ("promised_class", rules.promised_class or BLANK, CLASSES[rules.promised_class]),
            (
                "promised_for",
                rules.promised_for or BLANK,
                "the class of populations that the confidence was declared for; what t holds there "
                "depends on their skewness and on n",
            ),
            ("single_result", rules.single_result, SINGLES[rules.single_result]),
        ),
    )


def stated(rules: Rules, *, first_day: date | None = None) -> str:
    """Attribute the rules to whoever stated them, with the day and without vouching for it.

    Parameters
    ----------
    rules : Rules
    first_day : date or None
        Of field work; a later date of the rules is said to be later.

    Examples
    --------
    >>> stated(Rules(fixed_by="L. Fenn", fixed_on=date(2026, 11, 2)))
    'as stated by L. Fenn, fixed on 2026-11-02'
    >>> stated(Rules())
    'as stated in the campaign file, fixed on a day that nobody typed'
    """
    by = f"by {rules.fixed_by}" if rules.fixed_by else "in the campaign file"
    if rules.fixed_on is None:
        return f"as stated {by}, fixed on a day that nobody typed"
    late = ""
    if first_day is not None and rules.fixed_on > first_day:
        late = f", after the first day of field work, {first_day}"
    return f"as stated {by}, fixed on {rules.fixed_on}{late}"


def rules_blocks(rules: Rules) -> list[Block]:
    """Set the table, who fixed it and when, and how to check its fingerprint."""
    return [*recorded_blocks(rules), Paragraph(RECIPE, tone="note")]


RECIPE = (
    "The fingerprint is the start of the SHA-256 of the [rules] table, written as lines “key = "
    "value” in the order of the alphabet (fixed_by and fixed_on among them; what was not typed is "
    "left empty) and joined by line feeds."
)


def recorded_blocks(rules: Rules) -> list[Block]:
    """Set the table, and who fixed it when."""
    return [
        rules_table(rules),
        Facts(
            (
                ("Fixed by, as stated", rules.fixed_by or BLANK),
                ("Fixed on, as stated", str(rules.fixed_on or BLANK)),
                ("Fingerprint of the rules", rules_fingerprint(rules)),
            )
        ),
        Paragraph(UNVERIFIED),
    ]
