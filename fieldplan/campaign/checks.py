"""Rules that hold between keys and tables of a campaign file."""

from collections.abc import Callable, Iterator
from typing import Any, TypeGuard

from fieldplan.campaign.composite_checks import composite_problems
from fieldplan.campaign.facts import FACTS
from fieldplan.campaign.interval_checks import interval_problems
from fieldplan.campaign.line_checks import line_problems
from fieldplan.campaign.money_checks import PER_PLACE, money_problems
from fieldplan.campaign.non_detect_checks import non_detect_problems
from fieldplan.campaign.problems import Problem, accepted, meaning, near_miss, shown
from fieldplan.campaign.question_checks import needs_sigma, question_problems
from fieldplan.campaign.screen import is_fill_in
from fieldplan.campaign.strata_checks import strata_problems
from fieldplan.campaign.table import tables
from fieldplan.campaign.visit_checks import visit_problems

TARGETS = ("standard_error", "half_width", "relative_half_width", "budget")
"""The forms that a target may take; an objective has exactly one."""

AREA_LAYOUTS = (
    "simple-random",
    "stratified",
    "square-grid",
    "triangular-grid",
    "compact-strata",
    "balanced-list",
)
LIST_LAYOUTS = ("simple-random", "stratified", "balanced-list", "census")
SPREAD_VARIANCES = {
    "compact-strata": ("pairs", "covariance"),
    "balanced-list": ("neighbours", "covariance"),
}
"""What the variance may be estimated from, by layout; the first is what is done unasked."""
_AREA_ONLY = ("boundary", "boundary_assumed", "strata", "exclusion", "inset_m")

Data = dict[str, Any]


def check(data: Data) -> list[Problem]:
    """Return every rule between keys that ``data`` breaks; values of wrong type are passed over.

    Parameters
    ----------
    data : dict
        Screened tables with references filled in. A value that is still to fill in counts as
        given.
    """
    return [problem for rule in _RULES for problem in rule(data)]


def _plan(data: Data) -> Iterator[Problem]:
    for plan in tables(data, "plan"):
        first, last = plan.get("fieldwork_from"), plan.get("fieldwork_to")
        if _is_date(first) and _is_date(last) and last < first:
            text = f"field work ends before it begins on {first} (got {last}). Swap the two."
            yield Problem(("plan", "fieldwork_to"), text)


def _analytes(data: Data) -> Iterator[Problem]:
    for i, analyte in enumerate(tables(data, "analyte")):
        if "action_level" in analyte and not _has_words(analyte, "action_level_source"):
            text = "missing; an action level needs its source. Give document and date."
            yield Problem(("analyte", i, "action_level_source"), text)


def _frames(data: Data) -> Iterator[Problem]:
    for i, frame in enumerate(tables(data, "frame")):
        kind = frame.get("kind")
        if kind == "area":
            yield from _area_frame(frame, i)
        elif kind == "list":
            yield from _list_frame(frame, i)
        top, bottom = frame.get("depth_top_m"), frame.get("depth_bottom_m")
        if _is_number(top) and _is_number(bottom) and bottom <= top:
            text = (
                f"the bottom must lie below the top of {shown(top)} m (got {shown(bottom)}). "
                "Depths grow downwards."
            )
            yield Problem(("frame", i, "depth_bottom_m"), text)
        elif "depth_top_m" in frame and "depth_bottom_m" not in frame:
            text = "missing; a depth interval has a top and a bottom. Give both or neither."
            yield Problem(("frame", i, "depth_bottom_m"), text)


def _area_frame(frame: Data, i: int) -> Iterator[Problem]:
    if "boundary" not in frame:
        text = 'missing; an area needs the file of its outline. Give it, or "FILL IN".'
        yield Problem(("frame", i, "boundary"), text)
    if "list_file" in frame:
        text = 'a list belongs to kind = "list". Take it out, or change the kind.'
        yield Problem(("frame", i, "list_file"), text)


def _list_frame(frame: Data, i: int) -> Iterator[Problem]:
    if "list_file" not in frame:
        text = 'missing; a list needs the CSV of its members. Give it, or "FILL IN".'
        yield Problem(("frame", i, "list_file"), text)
    for key in _AREA_ONLY:
        if key in frame:
            text = 'this key belongs to kind = "area", not to a list. Take it out.'
            yield Problem(("frame", i, key), text)


_COORDINATES = ("latitude", "longitude", "easting", "northing")


def _columns(data: Data) -> Iterator[Problem]:
    """Refuse names for columns that nobody reads."""
    for i, frame in enumerate(tables(data, "frame")):
        named = _COORDINATES if frame.get("kind") == "area" else ("location_id", *_COORDINATES)
        yield from _unknown_columns(frame, ("frame", i), named)
    for i, targeted in enumerate(tables(data, "targeted")):
        yield from _unknown_columns(targeted, ("targeted", i), ("location_id", *_COORDINATES))


def _unknown_columns(
    table: Data, path: tuple[str | int, ...], known: tuple[str, ...]
) -> Iterator[Problem]:
    columns = table.get("columns")
    if not isinstance(columns, dict):
        return
    for key in columns:
        if key in known:
            continue
        if key == "stratum" and path[0] == "frame":
            text = f"a stratum has a key of its own. Write stratum_column = {shown(columns[key])}."
        else:
            near = near_miss(key, known) or f" Takes {', '.join(known)}."
            text = f"no column of ours that is read here (got {shown(key)}).{near}"
        yield Problem((*path, "columns", key), text)


def _designs(data: Data) -> Iterator[Problem]:
    frames = tables(data, "frame")
    frame = frames[0] if frames else {}
    for i, design in enumerate(tables(data, "design")):
        layout = design.get("layout")
        kind = frame.get("kind")
        allowed = {"area": AREA_LAYOUTS, "list": LIST_LAYOUTS}.get(str(kind), ())
        known = (*AREA_LAYOUTS, *LIST_LAYOUTS)
        if allowed and layout in known and layout not in allowed:
            text = (
                f"this layout does not suit a frame of kind {shown(kind)} (got {shown(layout)}). "
                f"Takes {', '.join(allowed)}."
            )
            yield Problem(("design", i, "layout"), text)
        if layout == "stratified" and kind == "area" and "strata" not in frame:
            text = "stratified, but the frame has no strata. Give frame.strata its file."
            yield Problem(("design", i, "layout"), text)
        if layout == "simple-random" and "strata" in frame:
            text = (
                f"draws from one population, but the frame has strata (got {shown(layout)}). "
                'Write layout = "stratified", or take frame.strata out.'
            )
            yield Problem(("design", i, "layout"), text)
        yield from _unsuitable_design_keys(design, layout, kind, i)


def _unsuitable_design_keys(
    design: Data, layout: object, kind: object, i: int
) -> Iterator[Problem]:
    if layout == "census":
        for key in ("locations", "alternates"):
            if design.get(key):
                text = "a census visits every member of the list. Take this key out."
                yield Problem(("design", i, key), text)
    if isinstance(layout, str) and not is_fill_in(layout):
        yield from _spread_keys(design, layout, i)
    if kind == "list" and design.get("minimum_spacing_m"):
        text = "members of a list stand where they stand. Take this key out."
        yield Problem(("design", i, "minimum_spacing_m"), text)


def _spread_keys(design: Data, layout: str, i: int) -> Iterator[Problem]:
    """Keep the keys of layouts that spread their places to the layouts that know them."""
    if layout != "compact-strata" and "per_cell" in design and not is_fill_in(design["per_cell"]):
        text = 'this key belongs to layout = "compact-strata". Take it out.'
        yield Problem(("design", i, "per_cell"), text)
    variance = design.get("variance")
    if variance is None or is_fill_in(variance):
        return
    suited = SPREAD_VARIANCES.get(layout)
    if suited is None:
        text = (
            "this key belongs to compact-strata and balanced-list; the places of this layout have "
            "a formula of their own. Take it out."
        )
        yield Problem(("design", i, "variance"), text)
    elif variance in ("pairs", "neighbours", "covariance") and variance not in suited:
        text = f"{layout} takes {' or '.join(map(shown, suited))} (got {shown(variance)})."
        yield Problem(("design", i, "variance"), text)


def _objectives(data: Data) -> Iterator[Problem]:
    objectives = tables(data, "objective")
    for i, objective in enumerate(objectives):
        given = [key for key in TARGETS if key in objective]
        yield from question_problems(data, objective, i)
        if objective.get("question", "mean") != "mean":
            continue
        if len(given) != 1:
            listed = ", ".join(given) if given else "none"
            text = f"needs exactly one of {', '.join(TARGETS)} (got {listed}). Keep one."
            yield Problem(("objective", i, *given[1:2]), text)
        if "budget" in given:
            yield from _budget(data, objective, i)
        yield from _assurance(objective, i)
        if "relative_half_width" in given and not _mean_is_known(data, objective):
            text = (
                "a share of the mean needs a mean: a pilot, or expected_mean beside the typed "
                "sigma. Add expected_mean to [[sigma]]."
            )
            yield Problem(("objective", i, "relative_half_width"), text)
    marked = [i for i, objective in enumerate(objectives) if objective.get("decides_n") is True]
    if len(objectives) > 1 and not marked:
        text = (
            "with several [[objective]] at least one has decides_n = true (got none). "
            "Mark the one that decides n, or all that do so together."
        )
        yield Problem(("objective", 0, "decides_n"), text)


def _assurance(objective: Data, i: int) -> Iterator[Problem]:
    """Ask for an assurance where a target can be missed, and refuse it where none can."""
    if "budget" in objective:
        for key in ("assurance", "assurance_chosen_by"):
            if key in objective:
                text = (
                    "a budget sets no precision that n could miss, so there is nothing to be "
                    f"sure of (got {shown(objective[key])}). Take this key out."
                )
                yield Problem(("objective", i, key), text)
    elif "assurance" not in objective:
        takes = accepted("Objective", "assurance")
        text = (
            f'missing; {meaning("objective", "assurance")}. Takes {takes}; "FILL IN" while it is '
            "not known."
        )
        yield Problem(("objective", i, "assurance"), text)


def _budget(data: Data, objective: Data, i: int) -> Iterator[Problem]:
    if "cost" not in data:
        text = "a budget needs [cost] with currency, per_location and per_analysis. Add it."
        yield Problem(("objective", i, "budget"), text)
        return
    for cost in tables(data, "cost"):
        each = [cost.get(key, 0) for key in PER_PLACE]
        if all(amount == 0 for amount in each):
            text = "a budget needs the cost of a location. Give per_location or per_analysis."
            yield Problem(("cost",), text)
        budget, fixed = objective.get("budget"), cost.get("mobilisation", 0)
        if _is_number(budget) and _is_number(fixed) and budget <= fixed:
            text = f"not above the mobilisation of {shown(fixed)} (got {shown(budget)}). Raise it."
            yield Problem(("objective", i, "budget"), text)


def _mean_is_known(data: Data, objective: Data) -> bool:
    entries = _sigma_of(data, objective.get("analyte"))
    return not entries or any("pilot" in entry or "expected_mean" in entry for entry in entries)


def _sigma_of(data: Data, analyte: object) -> list[Data]:
    return [entry for entry in tables(data, "sigma") if entry.get("analyte") == analyte]


def _sigmas(data: Data) -> Iterator[Problem]:
    seen: set[tuple[str, str, str]] = set()
    for i, sigma in enumerate(tables(data, "sigma")):
        if ("pilot" in sigma) == ("value" in sigma):
            got = "both" if "pilot" in sigma else "neither"
            text = f"needs exactly one of pilot and value (got {got}). Keep one."
            yield Problem(("sigma", i), text)
        elif "value" in sigma and not _has_words(sigma, "source"):
            text = 'missing; a typed value needs its source. Give it, or source = "ASSUMED".'
            yield Problem(("sigma", i, "source"), text)
        if "pilot" in sigma and "from_results" in sigma:
            text = "the pilot is counted, not typed. Take this key out."
            yield Problem(("sigma", i, "from_results"), text)
        part = str(sigma.get("part", "total"))
        entry = (str(sigma.get("analyte")), str(sigma.get("stratum", "")), part)
        if entry in seen:
            whole = "the whole site" if "stratum" not in sigma else f"stratum {entry[1]}"
            of_part = "" if part == "total" else f", part {part},"
            text = f"sigma of {entry[0]} for {whole}{of_part} stands twice. Keep one."
            yield Problem(("sigma", i), text)
        seen.add(entry)
        yield from _without_strata(data, ("sigma", i, "stratum"), "stratum" in sigma)


def _without_strata(data: Data, path: tuple[str | int, ...], given: bool) -> Iterator[Problem]:
    frames = tables(data, "frame")
    if given and frames and frames[0].get("kind") == "area" and "strata" not in frames[0]:
        text = "the frame has no strata. Give frame.strata its file, or take this key out."
        yield Problem(path, text)


def _deciding(data: Data) -> Iterator[Problem]:
    """Ask a sigma for the objectives that decide n, and one that their assurance can use."""
    objectives = tables(data, "objective")
    marked = [i for i, objective in enumerate(objectives) if objective.get("decides_n") is True]
    if len(objectives) == 1 and not marked:
        marked = [0]
    for i in marked:
        yield from _sigma_that_decides(data, objectives, i)


def _sigma_that_decides(data: Data, objectives: list[Data], i: int) -> Iterator[Problem]:
    analyte = objectives[i].get("analyte")
    entries = _sigma_of(data, analyte)
    ids = [known.get("id") for known in tables(data, "analyte")]
    resolved = all(entry.get("analyte") in ids for entry in tables(data, "sigma"))
    lacking = tables(data, "sigma") or needs_sigma(objectives[i])
    if not entries and lacking and analyte in ids and resolved:
        text = f"no [[sigma]] for {shown(analyte)}, whose objective decides n. Add one."
        yield Problem(("sigma",), text)
    assurance = objectives[i].get("assurance")
    if not _is_number(assurance) or not entries or "budget" in objectives[i]:
        return
    if all("value" in entry and not {"pilot", "from_results"} & set(entry) for entry in entries):
        text = (
            f"the chance that n is enough can be had only from a pilot or from_results beside "
            f"the typed sigma (got {shown(assurance)}). "
            'Add from_results to [[sigma]], or write assurance = "plain".'
        )
        yield Problem(("objective", i, "assurance"), text)


def _qc(data: Data) -> Iterator[Problem]:
    for i, control in enumerate(tables(data, "qc")):
        if ("share" in control) == ("count" in control):
            got = "both" if "share" in control else "neither"
            text = f"needs exactly one of share and count (got {got}). Keep one."
            yield Problem(("qc", i), text)


def _loss(data: Data) -> Iterator[Problem]:
    for loss in tables(data, "loss"):
        yield from _without_strata(data, ("loss", "by_stratum"), bool(loss.get("by_stratum")))


def _clearances(data: Data) -> Iterator[Problem]:
    for i, clearance in enumerate(tables(data, "clearance")):
        given, expires = clearance.get("given_on"), clearance.get("expires_on")
        if _is_date(given) and _is_date(expires) and expires < given:
            text = f"expires before it was given on {given} (got {expires}). Check both dates."
            yield Problem(("clearance", i, "expires_on"), text)


def _facts(data: Data) -> Iterator[Problem]:
    for field in tables(data, "field"):
        facts = field.get("facts")
        for i, fact in enumerate(facts if isinstance(facts, list) else []):
            if isinstance(fact, str) and fact not in FACTS and not is_fill_in(fact):
                near = near_miss(fact, list(FACTS)) or f" Takes {', '.join(FACTS)}."
                yield Problem(("field", "facts", i), f"no fact code (got {shown(fact)}).{near}")


def _is_number(value: object) -> TypeGuard[float]:
    return isinstance(value, int | float) and not isinstance(value, bool)


def _is_date(value: object) -> TypeGuard[str]:
    """Tell ISO text of a date, as the screen leaves it."""
    return isinstance(value, str) and len(value) == 10 and value[4:5] == "-"


def _has_words(table: Data, key: str) -> bool:
    value = table.get(key, "")
    return not isinstance(value, str) or bool(value.strip())


_RULES: tuple[Callable[[Data], Iterator[Problem]], ...] = (
    _plan,
    _analytes,
    _frames,
    line_problems,
    _columns,
    _designs,
    _objectives,
    _sigmas,
    visit_problems,
    strata_problems,
    composite_problems,
    _deciding,
    _qc,
    _loss,
    money_problems,
    _facts,
    _clearances,
    interval_problems,
    non_detect_problems,
)
