"""From answers to the text of a campaign file, with comments that teach its keys."""

import re
from datetime import date

from fieldplan.campaign.answers import Answers
from fieldplan.campaign.model import FILL_IN
from fieldplan.campaign.schema import SCHEMA_NAME

__all__ = ["Answers", "campaign_text", "initials", "toml_value", "waiting_tables"]

_HEAD = [
    f"#:schema ./{SCHEMA_NAME}",
    '# Paths start from this file. "FILL IN" marks what is not known yet.',
    "# A line such as '# key = value' waits: take the # away and put in what holds for you.",
    "format = 1",
]

_RULES = [
    "",
    "[rules]  # fixed before any result is seen",
    'interval = "two-sided"  # or upper-limit, lower-limit',
    "confidence = 0.95",
    '# promised_for = "locations whose skewness is no larger than 2"',
    '# fixed_by = "L. Fenn"',
    "# fixed_on = 2026-11-02",
]

_COST = [
    "",
    "# [cost]  # then every number of locations has its price",
    '# currency = "EUR"',
    "# mobilisation = 900",
    "# per_location = 28",
    "# per_analysis = 46",
]

_REST = [
    "",
    "# [[qc]]  # control samples, counted apart from n",
    '# kind = "field duplicate"',
    "# share = 0.10",
    '# source = "quality plan, section 4"',
    "",
    "[loss]  # locations that are expected to yield no result",
    "# share = 0.08",
    '# reason = "rubble under the turf"',
    "",
    "[field]  # what the crew needs to know that no map shows",
    '# method = "SOP-07, hand auger"',
    '# contact = "L. Fenn, number on the crew list"',
    '# laboratory = "the laboratory under contract"',
    "# position_accuracy_m = 2.0",
    "# offset_within_m = 3.0",
    '# offset_rule = "The first open direction of north, east, south, west."',
    '# facts = ["land-owned-by-others", "livestock"]  # raise cautions',
    "# ground_penetration = true",
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
        _HEAD,
        _plan(answers),
        _analyte(answers),
        _frame(answers),
        _design(answers),
        _objective(answers),
        _sigma(answers),
        _cost(answers),
        _RULES,
        _REST,
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


def waiting_tables(text: str) -> list[str]:
    """Name the tables of a campaign text whose header waits behind a ``#``.

    Examples
    --------
    >>> waiting_tables(campaign_text(Answers(seed=7)))
    ['[[frame.exclusion]]', '[cost]', '[[qc]]']
    """
    return re.findall(r"^# (\[+[a-z.]+\]+)", text, re.MULTILINE)


def _line(key: str, value: str | float | date | None, comment: str = "") -> str:
    """Write one key, with a comment behind it."""
    return f"{key} = {toml_value(value)}" + (f"  # {comment}" if comment else "")


def _asked(answers: Answers, name: str, example: str | float, *, comment: str = "") -> str:
    """Write an answer, FILL IN where it was asked for in vain, else an example that waits."""
    value = getattr(answers, name)
    if value is not None or name in answers.left_open:
        return _line(name, value, comment)
    return "# " + _line(name, example, comment)


def _plan(answers: Answers) -> list[str]:
    identifier = answers.plan_id
    if identifier is None and answers.title is not None and "plan_id" not in answers.left_open:
        identifier = initials(answers.title)
    dated = [] if answers.prepared_on is None else [_line("prepared_on", answers.prepared_on)]
    return [
        "",
        "[plan]",
        _line("id", identifier, "opens the name of every packet, such as QF-r01"),
        _line("title", answers.title),
        _asked(answers, "site", "Quarry Field"),
        _asked(answers, "prepared_by", "R. Amadi"),
        *dated,
        '# reviewed_by = "S. Okoro"',
        "# fieldwork_from = 2026-11-16",
        "# fieldwork_to = 2026-11-18",
        '# background = "A quarry until 1982, meadow since."',
        _asked(answers, "decision", "Whether the meadow is let for grazing."),
        _asked(answers, "decides", "L. Fenn"),
    ]


def _analyte(answers: Answers) -> list[str]:
    either = "or take both lines out" if "action_level" in answers.left_open else ""
    source = _asked(answers, "action_level_source", "Soil note 3, 2024, table 2", comment=either)
    if answers.action_level is not None or "action_level" in answers.left_open:
        source = _line("action_level_source", answers.action_level_source, either)
    return [
        "",
        "[[analyte]]",
        _line("name", answers.analyte),
        _line("unit", answers.unit, "the laboratory's; every amount below is in it"),
        '# basis = "dry weight"',
        "# reporting_limit = 5.0",
        _asked(answers, "action_level", 150.0, comment=either),
        source,
    ]


def _frame(answers: Answers) -> list[str]:
    lines = ["", "[[frame]]  # the population that the mean speaks for"]
    if answers.list_file is not None:
        return [
            *lines,
            _line("kind", "list"),
            _line("list_file", answers.list_file, "one row for each member"),
            '# unit_is = "one well, once"',
            '# time_window = "one round within three days, November 2026"',
            '# why_this_area = "The order speaks of these wells as a whole."',
        ]
    lines += [_line("kind", "area"), _line("boundary", answers.boundary)]
    if answers.boundary_assumed:
        lines.append(_line("boundary_assumed", True, "a circle; stamped ASSUMED on every page"))
    comment = "one outline for each part"
    if not answers.divided:
        comment += '; then layout = "stratified"'
    if "strata" in answers.left_open:
        comment = 'or take this line out, and write layout = "simple-random"'
    return [
        *lines,
        _asked(answers, "strata", "strata.geojson", comment=comment),
        "# inset_m = 3.0  # metres that locations keep from the edge",
        *_depth(answers),
        '# unit_is = "one auger core"',
        '# why_this_area = "One tenancy under one use."',
        "",
        "# [[frame.exclusion]]  # a part that is left out of the population",
        '# file = "pond.geojson"',
        '# reason = "open water"',
        "# buffer_m = 2.0",
    ]


def _depth(answers: Answers) -> list[str]:
    """Write the sampled interval, metres below the ground surface."""
    given = answers.depth_m
    behind = "" if given is not None or "depth_m" in answers.left_open else "# "
    top, bottom = given or ((0.0, 0.15) if behind else (None, None))
    either = "or take the three lines out" if not given and not behind else ""
    return [
        behind + _line("depth_top_m", top, either),
        behind + _line("depth_bottom_m", bottom),
        behind + _line("depth_datum", "ground surface"),
    ]


def _design(answers: Answers) -> list[str]:
    others = (
        "balanced-list, census"
        if answers.list_file is not None
        else "square-grid, triangular-grid, compact-strata, balanced-list"
    )
    layout, comment = "simple-random", f"or {others}"
    if answers.divided:
        layout = "stratified"
    return [
        "",
        "[[design]]",
        _line("layout", layout, comment),
        "# alternates = 2  # places in reserve",
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
        return [*lines, _line("pilot", answers.pilot, comment), *_columns(answers)]
    lines += [
        _line("value", answers.sigma, "standard deviation of single results"),
        _line("source", answers.sigma_source, "ASSUMED is stamped on every page"),
        _from_results(answers),
    ]
    if answers.expected_mean is not None or answers.target_kind == "relative_half_width":
        lines.append(_line("expected_mean", answers.expected_mean))
    return lines


def _from_results(answers: Answers) -> str:
    """Write how many results are behind sigma; what nobody knows is not asked for again."""
    comment = "results behind the value; without it the assurance can only be plain"
    if answers.from_results is None and answers.assurance not in (None, "plain"):
        return _line("from_results", None, "not known? out with this line, and assurance = plain")
    return _asked(answers, "from_results", 8, comment=comment)


def _columns(answers: Answers) -> list[str]:
    """Write what the pilot's columns are called there."""
    if not answers.pilot_columns:
        return []
    inside = ", ".join(f"{ours} = {toml_value(t)}" for ours, t in answers.pilot_columns.items())
    return [f"columns = {{ {inside} }}"]


def _cost(answers: Answers) -> list[str]:
    if answers.target_kind != "budget":
        return _COST
    return [
        "",
        "[cost]",
        _line("currency", None),
        _line("per_location", None, "for each location visited"),
        _line("per_analysis", None, "for each sample analysed"),
    ]


def _draw(answers: Answers) -> list[str]:
    return ["", "[draw]", _line("seed", answers.seed, "the same seed draws the same locations")]
