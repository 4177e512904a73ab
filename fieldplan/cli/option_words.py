"""Remedies in the words of options, where options were typed and there is no campaign file."""

import re
from dataclasses import replace
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from fieldplan.sizing.model import Finding, Size

PRICES = "--with cost.currency=EUR --with cost.per_location=28 --with cost.per_analysis=46"
_PAIRS = (
    (r"The campaign file fixes ", "The options fix "),
    (r'\[rules\] fixes another(.*?)Write interval = "upper-limit" and confidence = ([\d.]+) there',
     r"the options fix another\1Add --one-sided and --confidence \2"),
    (r"the interval that \[rules\] fixes", "the interval that the options fix"),
    (r"\[rules\] fix(es)?\b", r"the options fix"),
    (r'Add a \[\[sigma\]\] table with part = "(\w+)", or a pilot with duplicates that tell it',
     r"Add --with sigma.\1=5, with yours"),
    (r"[Ww]rite expected_mean in (?:the|every) \[\[sigma\]\] table, or name a pilot file there",
     "add --mean"),
    (r"Write mean_from and mean_to below \[\[objective\]\]",
     "Add --with objective.mean_from=90 and --with objective.mean_to=160, with yours"),
    (r": the analyte has no action_level\. Give action_level and action_level_source in .*?\]\]",
     ". Add --level"),
    (r"(?:give )?action_level and action_level_source in its \[\[analyte\]\]", "add --level"),
    (r"\(got neither\)\. Keep one", "(got neither). Type one"),
    (r"Write action_level in \[\[analyte\]\]", "Add --level"),
    (r"[Aa]dd a \[cost\] table with (?:currency, )?(?:mobilisation, )?per_location and "
     r"per_analysis", f"add {PRICES}, with yours"),
    (r"Add \[cost\] with per_location and per_analysis", f"Add {PRICES}, with yours"),
    (r"a budget needs \[cost\] with currency, per_location and per_analysis\. Add it",
     f"a budget needs prices. Add {PRICES}, with yours"),
    (r"type what a location and an analysis cost in the \[cost\] table",
     "type --with cost.per_location=28 or --with cost.per_analysis=46, with yours"),
    (r"type per_location or per_analysis in \[cost\]",
     "type --with cost.per_location=28 or --with cost.per_analysis=46, with yours"),
    (r"type their prices in the \[cost\] table",
     "type --with cost.per_increment=2 and --with cost.per_analysis=46, with yours"),
    (r"is missing or 0 \(got \"choose\"\)\. Add it to \[cost\], or write a number of increments or "
     r"of replicates", "is missing or 0. Add --with cost.per_increment=2, or type a number in "
     "place of choose"),
    (r'Add from_results to \[\[sigma\]\], or write assurance = "plain"',
     "Add --pilot-n, or leave the assurance out"),
    (r"Add expected_mean to \[\[sigma\]\]", "Add --mean"),
    (r"Add a \[\[sigma\]\] for the whole, or with part = \"[\w-]+\"", "Add --sigma for the whole"),
    (r"Write a \[\[sigma\]\] table", "Add --sigma, and --mean where a mean is needed"),
    (r'Write (\w+) = "?([\w.-]+)"?(?=[.,])', r"Type --with \1=\2"),
    (r'; "FILL IN" while it is not known', ""),
    (r', or "FILL IN"', ""),
    (r"no table \((got .*?)\)\. Write \[+[\w.]+\]+ on a line of its own",
     r"a table of keys (\1). Type a point and one of its keys after it"),
    (r"Give frame\.strata its file, or take this (?:key )?out",
     "Type --stratum for each, or take this out"),
    (r"that is fair into \[\[sigma\]\] with its source", "that is fair as --sigma"),
    (r"\[design\.(\w+)\]", r"--with design.\1"),
    (r"\[loss\] by_stratum", "--with loss.by_stratum"),
    (r"\[cost\.(\w+)\]", r"--with cost.\1"),
    (r"(?<!key )(?<!belong )(?:in the|into its|in its|in) "
     r"\[\[?(sigma|analyte|rules|cost)\]?\](?: table)?", r"by --with \1.…"),
    (r"below \[\[objective\]\]", "by --with"),
    (r"\(95 % two sided\)", "(95 % two-sided)"),
)  # fmt: skip
_KEYS = {
    "sigma.value": "--sigma",
    "sigma.from_results": "--pilot-n",
    "sigma.expected_mean": "--mean",
    "sigma.skewness": "--skewness",
    "sigma.excess_kurtosis": "--excess-kurtosis",
    "analyte.unit": "--unit",
    "analyte.action_level": "--level",
    "design.layout": "--layout",
    "design.allocation": "--allocation",
    "design.floor": "--floor",
    "rules.confidence": "--confidence",
    "rules.interval": "--one-sided",
    "objective.question": "--question",
    "objective.assurance": "--assurance",
    "objective.standard_error": "--standard-error",
    "objective.half_width": "--half-width",
    "objective.relative_half_width": "--relative-half-width",
    "objective.budget": "--budget",
}


def in_options(sentence: str) -> str:
    """Put a remedy for a campaign file into the words of options.

    Examples
    --------
    >>> in_options("The campaign file fixes 12 locations.")
    'The options fix 12 locations.'
    """
    for pattern, words in _PAIRS:
        sentence = re.sub(pattern, words, sentence)
    homes = re.search(r"does not belong in .*?\. Write it below (.*)\.$", sentence)
    if homes:
        tables = homes[1].replace("[", "").replace("]", "")
        return f"this key has another table: {tables}. Type that before it."
    return sentence


def key_in_options(name: str, own: str) -> str:
    """Name a key of a campaign file as it is typed.

    Parameters
    ----------
    name : str
        Such as ``objective.share.margin``.
    own : str
        The table of the question asked; its keys need no table before them.

    Examples
    --------
    >>> key_in_options("objective.share.margin", "share"), key_in_options("sigma.value", "share")
    ('--with margin', '--sigma')
    """
    name = re.sub(r"\[\d+\]", "", name)
    if name in _KEYS:
        return _KEYS[name]
    return f"--with {name.removeprefix(f'objective.{own}.')}" if name else ""


def answer_in_options(answer: "Size") -> "Size":
    """Put every sentence of an answer to bare numbers into the words of options.

    Parameters
    ----------
    answer : Size

    Returns
    -------
    Size
    """
    return replace(
        answer,
        sentences=_all(answer.sentences),
        conditions=_all(answer.conditions),
        findings=tuple(_finding(finding) for finding in answer.findings),
    )


def _finding(finding: "Finding") -> "Finding":
    return replace(
        finding,
        answer=in_options(finding.answer),
        assumptions=_all(finding.assumptions),
        warnings=_all(finding.warnings),
    )


def _all(sentences: tuple[str, ...]) -> tuple[str, ...]:
    return tuple(in_options(sentence) for sentence in sentences)
