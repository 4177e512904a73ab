"""From answers to the text of a campaign file, with comments that teach its keys."""

from dataclasses import dataclass
from datetime import date
from typing import Literal

from fieldplan.campaign.model import FILL_IN
from fieldplan.campaign.schema import SCHEMA_NAME

TargetKind = Literal["standard_error", "half_width", "relative_half_width", "budget"]


@dataclass(frozen=True)
class Answers:
    """What a person could say about a campaign; None where the answer is not known yet.

    Parameters
    ----------
    seed : int
        Always known: it is drawn when nobody gives one.
    plan_id, title, prepared_by : str, optional
    prepared_on : date, optional
    boundary, list_file : str, optional
        Path from the campaign file, ``/`` between folders. A list makes the frame a list.
    boundary_assumed : bool
        The boundary is a circle round a point.
    analyte, unit : str, optional
        The analyte's name and the laboratory's unit.
    target_kind, target : str, float, optional
        Which form the target takes, and its amount.
    pilot : str, optional
        Path of the pilot results; the typed sigma is ignored when it is given.
    sigma, sigma_source, from_results, expected_mean : float, str, int, float, optional
        A typed standard deviation, where it comes from, how many results are behind it, and the
        mean that is expected.
    assurance : float or "plain", optional
    chosen_by : str, optional
        Who chose the assurance.
    """

    seed: int
    plan_id: str | None = None
    title: str | None = None
    prepared_by: str | None = None
    prepared_on: date | None = None
    boundary: str | None = None
    boundary_assumed: bool = False
    list_file: str | None = None
    analyte: str | None = None
    unit: str | None = None
    target_kind: TargetKind | None = None
    target: float | None = None
    pilot: str | None = None
    sigma: float | None = None
    sigma_source: str | None = None
    from_results: int | None = None
    expected_mean: float | None = None
    assurance: float | Literal["plain"] | None = None
    chosen_by: str | None = None


_RULES = [
    "",
    "[rules]  # fixed before any result is seen",
    'interval = "two-sided"  # or upper-limit, lower-limit',
    "confidence = 0.95",
    "# promised_for, fixed_by and fixed_on are worth adding here.",
]


def campaign_text(answers: Answers) -> str:
    """Write a campaign file from answers.

    Parameters
    ----------
    answers : Answers
        What is not known becomes ``"FILL IN"``; no number is made up.

    Returns
    -------
    str
        TOML that ``read_campaign`` takes once everything is filled in.

    Examples
    --------
    >>> text = campaign_text(Answers(seed=7, analyte="Lead"))
    >>> [line for line in text.splitlines() if line.startswith("name")]
    ['name = "Lead"']
    """
    parts = (
        [f"#:schema ./{SCHEMA_NAME}"],
        ['# Paths start from this file. "FILL IN" marks what is not known yet.'],
        ["format = 1"],
        _plan(answers),
        _analyte(answers),
        _frame(answers),
        _design(answers),
        _objective(answers),
        _sigma(answers),
        _cost(answers),
        _RULES,
        _draw(answers),
    )
    return "\n".join(line for part in parts for line in part) + "\n"


def toml_value(value: str | float | date | None) -> str:
    r"""Write a value as TOML: text in double quotes with escapes, or ``"FILL IN"`` for None.

    Parameters
    ----------
    value : str, float, int, bool, date or None
        Half a surrogate pair, which no file can hold, becomes a question mark.

    Examples
    --------
    >>> toml_value('the "old" yard'), toml_value(0.8), toml_value(None)
    ('"the \\"old\\" yard"', '0.8', '"FILL IN"')
    """
    if value is None:
        value = FILL_IN
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, date):
        return value.isoformat()
    if isinstance(value, int | float):
        return repr(value)
    text = value.encode("utf-8", errors="replace").decode("utf-8")
    return '"' + "".join(_escaped(character) for character in text) + '"'


_ESCAPES = {'"': '\\"', "\\": "\\\\", "\n": "\\n", "\r": "\\r", "\t": "\\t"}


def _escaped(character: str) -> str:
    """Escape one character of a text in double quotes."""
    if character in _ESCAPES:
        return _ESCAPES[character]
    return character if character.isprintable() else f"\\U{ord(character):08X}"


def initials(title: str) -> str:
    """Make a short plan id from a title: the first letters of its words.

    Examples
    --------
    >>> initials("Quarry Field, lead in topsoil"), initials("湖")
    ('QFLI', 'PLAN')
    """
    words = "".join(c if c.isascii() and c.isalnum() else " " for c in title).split()
    letters = "".join(word[0] for word in words if word[0].isalpha()).upper()[:4]
    return letters if len(letters) > 1 else "PLAN"


def _line(key: str, value: str | float | date | None, comment: str = "") -> str:
    """Write one key, with a comment behind it."""
    return f"{key} = {toml_value(value)}" + (f"  # {comment}" if comment else "")


def _plan(answers: Answers) -> list[str]:
    identifier = answers.plan_id
    if identifier is None and answers.title is not None:
        identifier = initials(answers.title)
    lines = [
        "",
        "[plan]",
        _line("id", identifier, "opens the name of every packet, such as QF-r01"),
        _line("title", answers.title),
    ]
    if answers.prepared_by is not None:
        lines.append(_line("prepared_by", answers.prepared_by))
    if answers.prepared_on is not None:
        lines.append(_line("prepared_on", answers.prepared_on))
    return lines


def _analyte(answers: Answers) -> list[str]:
    return [
        "",
        "[[analyte]]",
        _line("name", answers.analyte),
        _line("unit", answers.unit, "the laboratory's; every amount below is in it"),
        "# reporting_limit, action_level and action_level_source are worth adding here.",
    ]


def _frame(answers: Answers) -> list[str]:
    lines = ["", "[[frame]]  # the population that the mean speaks for"]
    if answers.list_file is not None:
        return [
            *lines,
            _line("kind", "list"),
            _line("list_file", answers.list_file, "one row for each member"),
        ]
    lines += [_line("kind", "area"), _line("boundary", answers.boundary)]
    if answers.boundary_assumed:
        lines.append(_line("boundary_assumed", True, "a circle; stamped ASSUMED on every page"))
    lines.append('# strata = "strata.geojson" and [[frame.exclusion]] divide and cut the site.')
    return lines


def _design(answers: Answers) -> list[str]:
    layouts = "simple-random, stratified, "
    layouts += "census" if answers.list_file is not None else "square-grid, triangular-grid"
    return [
        "",
        "[[design]]",
        _line("layout", "simple-random", f"or another of {layouts}"),
    ]


def _objective(answers: Answers) -> list[str]:
    unit = answers.unit or "the analyte's unit"
    comments = {
        "standard_error": f"largest standard error of the mean, in {unit}",
        "half_width": f"mean ± this, at the confidence in [rules], in {unit}",
        "relative_half_width": "half-width as a share of the mean: 0.20 is 20 %",
        "budget": "in the currency of [cost]",
    }
    kind = answers.target_kind or "half_width"
    lines = ["", "[[objective]]", _line("question", "mean")]
    if answers.target_kind is None:
        lines.append("# How far off the mean may be: half_width, or one of standard_error,")
        lines.append("# relative_half_width and budget in its place.")
    comment = " ".join(comments[kind].split())
    lines.append(_line(kind, answers.target, comment))
    if kind == "budget":  # it sets no precision that n could miss
        return lines
    lines += [
        '# How sure it shall be that n is enough: a share such as 0.80, or "plain" for the bare',
        "# formula, which is enough in about half of campaigns.",
        _line("assurance", answers.assurance),
        _line("assurance_chosen_by", answers.chosen_by),
    ]
    return lines


def _sigma(answers: Answers) -> list[str]:
    lines = ["", "[[sigma]]  # how far single results spread"]
    if answers.pilot is not None or answers.sigma is None:
        comment = "" if answers.pilot else "CSV or XLSX; or value and source in its place"
        return [*lines, _line("pilot", answers.pilot, comment)]
    lines += [
        _line("value", answers.sigma, "standard deviation of single results"),
        _line("source", answers.sigma_source, "ASSUMED is stamped on every page"),
    ]
    if answers.from_results is not None or answers.assurance not in (None, "plain"):
        lines.append(_line("from_results", answers.from_results, "results behind the value"))
    if answers.expected_mean is not None or answers.target_kind == "relative_half_width":
        lines.append(_line("expected_mean", answers.expected_mean))
    return lines


def _cost(answers: Answers) -> list[str]:
    if answers.target_kind != "budget":
        return []
    return [
        "",
        "[cost]",
        _line("currency", None),
        _line("per_location", None, "for each location visited"),
        _line("per_analysis", None, "for each sample analysed"),
    ]


def _draw(answers: Answers) -> list[str]:
    return ["", "[draw]", _line("seed", answers.seed, "the same seed draws the same locations")]
