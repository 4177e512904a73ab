"""What ``check`` finds: the campaign file, every file that it names, and what they lead to."""

import re
from contextlib import suppress
from dataclasses import dataclass, field
from datetime import date
from pathlib import Path

from fieldplan.base.errors import FieldplanError
from fieldplan.campaign.model import Analyte, Campaign, Objective, ReadCampaign
from fieldplan.campaign.read import OpenEntry


@dataclass
class Findings:
    """All that ``check`` has to say about one campaign file."""

    understood: list[str] = field(default_factory=list)
    alarms: list[str] = field(default_factory=list)
    problems: list[str] = field(default_factory=list)
    fill_in: list[OpenEntry] = field(default_factory=list)
    answer: str = ""
    exit_code: int = 0

    def refuse(self, fault: FieldplanError) -> None:
        """Keep the lines of an error and the exit code that goes with it."""
        self.problems += [line for line in fault.problems if line not in self.problems]
        self.exit_code = max(self.exit_code, fault.exit_code)


def look_at(path: Path) -> Findings:
    """Read a campaign file and everything that it names, and decide what a packet decides.

    Parameters
    ----------
    path : Path
        While something is open or wrong, what is known is read as far as it goes.
    """
    from fieldplan.campaign import alarms, draft, inspect_campaign, missing_files

    found = Findings()
    try:
        inspection = inspect_campaign(path)
    except FieldplanError as fault:
        found.refuse(fault)
        return found
    missing = missing_files(inspection)
    found.problems += [*inspection.problems, *missing]
    found.fill_in += inspection.fill_in
    found.exit_code = 2 if found.problems else 0
    whole, known = inspection.campaign, draft(inspection)
    if whole is not None:
        found.understood += asked(whole.campaign)
        found.alarms += alarms(whole.campaign, made_on=date.today())
    if missing or known is None:
        return found
    if whole is not None:
        _decide(whole, found)
    else:
        _read_what_is_known(known, found)
    return found


def _decide(read: ReadCampaign, found: Findings) -> None:
    """Try everything that a packet decides; after an error keep what was understood before it."""
    from fieldplan.plan.make import make_plan

    try:
        plan = make_plan(read, made_on=date.today())
    except FieldplanError as fault:
        with suppress(FieldplanError):
            _read_site_and_pilot(read, found)
        found.refuse(fault)
        return
    frame, spread = plan.frame, plan.spread
    found.understood += [*frame.population.sentences, *frame.notes]
    found.understood += [*spread.sentences, *spread.notes, *plan.locations.notes]
    found.answer = plan.size.sentences[0]


def _read_site_and_pilot(read: ReadCampaign, found: Findings) -> None:
    """Read the files of a campaign, sentence by sentence."""
    from fieldplan.frame import read_frame
    from fieldplan.lab import read_spread

    frame = read_frame(read)
    found.understood += [*frame.population.sentences, *frame.notes]
    spread = read_spread(read, frame)
    found.understood += [*spread.sentences, *spread.notes]


_WORDS = {
    "frame": {
        "unit_is", "depth_top_m", "depth_bottom_m", "depth_datum", "size_fraction",
        "time_window", "why_this_area", "exclusion.reason",
    },
    "sigma": {"source", "from_results", "expected_mean", "skewness"},
    "analyte": {"reporting_limit", "action_level", "action_level_source", "matrix"},
}  # fmt: skip
"""Keys that change nothing about how files are read."""

_CUTS = {"strata", "inset_m", "exclusion.file", "exclusion.buffer_m"}
"""Keys of a frame without which its boundary can still be read, though not all of its measure."""


def _read_what_is_known(read: ReadCampaign, found: Findings) -> None:
    """Read the files that an incomplete campaign names, as far as it says how to read them."""
    from fieldplan.frame import read_frame
    from fieldplan.lab import read_spread

    frame_open, sigma_open, analyte_open = (
        _open_keys(found.fill_in, table) for table in ("frame", "sigma", "analyte")
    )
    frame = None
    if not frame_open - _CUTS:
        try:
            frame = read_frame(read)
        except FieldplanError as fault:
            found.refuse(fault)
    if frame is not None and not frame_open:
        found.understood += [*frame.population.sentences, *frame.notes]
    if analyte_open or "columns" in sigma_open:
        return
    asked_open = _open_keys(found.fill_in, "objective") & {"analyte", "decides_n"}
    try:
        if frame is None or frame_open or sigma_open or asked_open:
            _read_pilots(read)
        else:
            spread = read_spread(read, frame)
            found.understood += [*spread.sentences, *spread.notes]
    except FieldplanError as fault:
        found.refuse(fault)


def _open_keys(entries: list[OpenEntry], table: str) -> set[str]:
    """Name the open keys of a table that decide how files are read."""
    keys = [re.sub(r"\[\d+\]", "", entry.key) for entry in entries]
    inside = {key.removeprefix(f"{table}.") for key in keys if key.startswith(f"{table}.")}
    return inside - _WORDS.get(table, set())


def _read_pilots(read: ReadCampaign) -> None:
    """Read the rows of every pilot that is named, without the site they lie in."""
    from fieldplan.campaign.inputs import resolve_file
    from fieldplan.lab import read_lab

    for sigma in read.campaign.sigma:
        if sigma.pilot is not None:
            path = resolve_file(read, sigma.pilot)
            read_lab(path, read.campaign, columns=sigma.columns, of_pilot=True)


def asked(campaign: Campaign) -> list[str]:
    """Say what a campaign asks, in sentences."""
    objective, analyte = campaign.deciding_objective, campaign.deciding_analyte
    chosen = f" ({objective.assurance_chosen_by})" if objective.assurance_chosen_by else ""
    if objective.question != "mean":
        sure = "The question decides n; no precision of a mean is asked for."
    elif objective.assurance is None:
        sure = "The budget decides n; no precision is asked for that it could miss."
    elif objective.assurance == "plain":
        sure = f"The bare formula decides n{chosen}: it is enough in about half of campaigns."
    else:
        sure = f"n shall be enough with a chance of {objective.assurance * 100:g} %{chosen}."
    layout = campaign.design[0].layout
    return [
        f"{campaign.plan.title} ({campaign.plan.id}).",
        f"{_said('Asked', objective, campaign, analyte)}; "
        f"locations {_LAYOUTS[layout]}, seed {campaign.draw.seed}.",
        sure,
        *_also_asked(campaign),
    ]


def _said(start: str, objective: Objective, campaign: Campaign, analyte: Analyte) -> str:
    """Say what an objective asks of an analyte, behind ``Asked`` or ``Also asked``."""
    from fieldplan.campaign.questions import meanings, table_of

    if objective.question != "mean":
        asked = meanings()[f"objective.{table_of(objective.question)}"]
        return f"{start} of {analyte.label}: {asked}"
    target = _target(objective, campaign, analyte.unit)
    return f"{start}: the mean of {analyte.label} with {target}"


def _also_asked(campaign: Campaign) -> list[str]:
    """Say what else is asked or measured, and whether it decides n."""
    deciding = campaign.deciding_objective
    others = [o for o in campaign.objective if o is not deciding]
    asked = {objective.analyte for objective in campaign.objective}
    lines = []
    for objective in others:
        analyte = campaign.analyte_called(objective.analyte or campaign.deciding_analyte.id)
        said = _said("Also asked", objective, campaign, analyte)
        role = "it decides n as well" if objective.decides_n else "it does not decide n"
        lines.append(f"{said}; {role}.")
    for analyte in campaign.analyte:
        if analyte.id not in asked and analyte.id != campaign.deciding_analyte.id:
            lines.append(f"Measured too, without a target: {analyte.label}.")
    return lines


_LAYOUTS = {
    "simple-random": "drawn at random",
    "stratified": "drawn at random in each stratum",
    "square-grid": "on a square grid with a random start",
    "triangular-grid": "on a triangular grid with a random start",
    "balanced-list": "on a balanced list, spread over the ground",
    "compact-strata": "in compact cells of nearly equal area",
    "even-spacing": "evenly spaced along the lines from a random start",
    "census": "are all members of the list",
}


def _target(objective: Objective, campaign: Campaign, unit: str) -> str:
    """Say the target of an objective."""
    rules = campaign.rules
    interval = f"{rules.confidence * 100:g} %, {rules.interval}"
    if rules.mean_interval != "student-t":
        interval += f", {rules.mean_interval} for {rules.promised_class}"
    if objective.standard_error is not None:
        return f"a standard error of at most {objective.standard_error:g} {unit}"
    if objective.half_width is not None:
        return f"a half-width of at most {objective.half_width:g} {unit} ({interval})"
    if objective.relative_half_width is not None:
        share = objective.relative_half_width * 100
        return f"a half-width of at most {share:g} % of the mean ({interval})"
    currency = campaign.cost.currency if campaign.cost else ""
    return f"what {objective.budget:g} {currency} can buy"
