"""Campaign files for tests: a plain one of about 30 lines, and how to bend it."""

from pathlib import Path

from fieldplan.campaign import Inspection, inspect_campaign

PLAIN = """\
format = 1

[plan]
id = "QF"
title = "Quarry Field, lead in topsoil"

[[analyte]]
name = "Lead"
unit = "mg/kg"

[[frame]]
kind = "area"
boundary = "boundary.geojson"

[[design]]
layout = "simple-random"

[[objective]]
question = "mean"
standard_error = 6.0
assurance = 0.80
assurance_chosen_by = "L. Fenn"

[[sigma]]
pilot = "pilot.csv"

[draw]
seed = 12
"""


def bent(*changes: tuple[str, str]) -> str:
    """Return the plain file with some of its text replaced, each piece of which must be there."""
    text = PLAIN
    for old, new in changes:
        assert text.count(old) == 1, old
        text = text.replace(old, new)
    return text


def inspected(folder: Path, text: str) -> Inspection:
    """Write a campaign file and inspect it."""
    path = folder / "campaign.toml"
    path.write_text(text, encoding="utf-8")
    return inspect_campaign(path)


def told(folder: Path, text: str) -> list[str]:
    """Return the problems of a campaign text, each from its line number on."""
    problems = inspected(folder, text).problems
    return [problem.split("campaign.toml:", 1)[1] for problem in problems]
