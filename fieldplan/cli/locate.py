"""``fieldplan locate``: draw locations and look at them, without a packet."""

from collections.abc import Sequence
from datetime import date
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from fieldplan.cli.options import (
    campaign_argument,
    json_option,
    print_json,
    print_sentences,
    quiet_option,
    say,
    wrapped,
)

if TYPE_CHECKING:
    from fieldplan.campaign.model import ReadCampaign
    from fieldplan.design.evenness import Evenness
    from fieldplan.design.model import Location
    from fieldplan.plan.model import Plan

LAYOUT_NAMES = (
    "simple-random",
    "stratified",
    "square-grid",
    "triangular-grid",
    "compact-strata",
    "balanced-list",
    "even-spacing",
    "census",
)
MOST_ROWS = 40


@click.command("locate")
@campaign_argument()
@click.option("--count", type=click.IntRange(min=2), help="Draw this many, shared between strata.")
@click.option("--layout", type=click.Choice(LAYOUT_NAMES), help="Draw this layout instead.")
@click.option("--seed", type=click.IntRange(0, 2**63 - 1), help="Draw with this seed instead.")
@click.option("--compare", is_flag=True, help="Draw each layout that fits; print how even it is.")
@click.option(
    "--csv",
    "csv_file",
    type=click.Path(path_type=Path, dir_okay=False, allow_dash=True),
    metavar="FILE",
    help="Write the locations as CSV; - prints them instead of the table.",
)
@click.option(
    "--map",
    "map_file",
    type=click.Path(path_type=Path, dir_okay=False),
    metavar="FILE.html",
    help="Write the map for a screen.",
)
@json_option
@quiet_option
def command(
    campaign_file: Path,
    compare: bool,
    csv_file: Path | None,
    map_file: Path | None,
    as_json: bool,
    quiet: bool,
    **changes: Any,
) -> None:
    """Draw locations and look at them, without a packet.

    Nothing is issued: only a packet binds the locations to samples, forms and a record. With no
    option the locations are those that "fieldplan pack" would issue now.
    """
    from fieldplan.campaign import read_campaign

    read = changed(read_campaign(campaign_file), **changes)
    if compare:
        _compare(read, as_json=as_json, quiet=quiet, refused=csv_file or map_file)
        return
    from fieldplan.plan.make import make_plan

    plan = make_plan(read, made_on=date.today())
    to_stdout = csv_file is not None and str(csv_file) == "-"
    _write_files(plan, csv_file=None if to_stdout else csv_file, map_file=map_file, quiet=quiet)
    if as_json:
        print_json({"sentence": sentence(plan), "locations": plan.locations})
    elif to_stdout:
        from fieldplan.packet.exchange.points_csv import write_points_csv

        click.echo(write_points_csv(plan).decode("utf-8-sig").replace("\r\n", "\n"), nl=False)
    else:
        _print_locations(plan, quiet=quiet)


def changed(
    read: "ReadCampaign", *, count: int | None, layout: str | None, seed: int | None
) -> "ReadCampaign":
    """Put the options in place of what the campaign file says; the file stays as it is."""
    from fieldplan.base.errors import CampaignError

    design = read.campaign.design[0]
    if count is not None and (layout or design.layout) == "census":
        message = f"--count {count} beside a census: a census visits every unit; leave one out."
        raise CampaignError(message)
    typed = {"locations": count, "layout": layout}
    design = design.model_copy(update={k: v for k, v in typed.items() if v is not None})
    draw = read.campaign.draw
    if seed is not None:
        draw = draw.model_copy(update={"seed": seed})
    campaign = read.campaign.model_copy(
        update={"design": (design, *read.campaign.design[1:]), "draw": draw}
    )
    return read.model_copy(update={"campaign": campaign})


def sentence(plan: "Plan") -> str:
    """Say how many locations of which class were drawn, how, and from which seed.

    Parameters
    ----------
    plan : Plan
    """
    drawn = plan.locations
    several = len(plan.frame.strata) > 1
    inside = f" in {len(plan.frame.strata)} strata" if several else ""
    others = [
        f"{len(places)} {word}"
        for word, places in (
            ("alternates", drawn.of_class("alternate")),
            ("targeted places", drawn.of_class("targeted")),
        )
        if places
    ]
    beside = f", beside {' and '.join(others)}" if others else ""
    return f"{drawn.realised} locations{inside}{beside}: layout {drawn.layout}, seed {drawn.seed}."


def _write_files(
    plan: "Plan", *, csv_file: Path | None, map_file: Path | None, quiet: bool
) -> None:
    from fieldplan.base.files import write_new

    if csv_file is not None:
        from fieldplan.packet.exchange.points_csv import write_points_csv

        say(f"wrote {write_new(csv_file, write_points_csv(plan))}", quiet=quiet)
    if map_file is not None:
        from fieldplan.packet.maps.screen import screen_map

        say(f"wrote {write_new(map_file, screen_map(plan))}", quiet=quiet)


def _print_locations(plan: "Plan", *, quiet: bool) -> None:
    click.echo(wrapped(sentence(plan)))
    if quiet:
        return
    print_sentences(plan.locations.notes)
    places = plan.locations.places
    click.echo()
    for line in table(places[:MOST_ROWS]):
        click.echo(line)
    if len(places) > MOST_ROWS:
        say(f"… and {len(places) - MOST_ROWS} more: --csv - prints them all.")


def table(places: Sequence["Location"]) -> list[str]:
    """Set locations in columns that fit a terminal of 80.

    Parameters
    ----------
    places : sequence of Location
    """
    rows = [("name", "location_id", "class", "stratum", "latitude", "longitude")]
    rows += [
        (
            place.short_name,
            _cut(place.location_id, 16),
            place.location_class,
            _cut(place.stratum, 14),
            f"{place.latitude:.7f}",
            f"{place.longitude:.7f}",
        )
        for place in places
    ]
    return _columns(rows, flush_right=2)


def _cut(text: str, width: int) -> str:
    return text if len(text) <= width else text[: width - 1] + "…"


def _columns(rows: Sequence[Sequence[str]], *, flush_right: int) -> list[str]:
    widths = [max(map(len, column)) for column in zip(*rows, strict=True)]
    first_right = len(widths) - flush_right
    return [
        "  ".join(
            cell.rjust(width) if at >= first_right else cell.ljust(width)
            for at, (cell, width) in enumerate(zip(row, widths, strict=True))
        ).rstrip()
        for row in rows
    ]


def _compare(read: "ReadCampaign", *, as_json: bool, quiet: bool, refused: Path | None) -> None:
    from fieldplan.base.errors import CampaignError
    from fieldplan.design.evenness import compare_layouts
    from fieldplan.design.model import StratumCount
    from fieldplan.frame import read_frame
    from fieldplan.lab import read_spread
    from fieldplan.sizing import size

    if refused is not None:
        message = f"--compare draws several layouts; {refused} has room for one. Leave one out."
        raise CampaignError(message)
    campaign, frame = read.campaign, read_frame(read)
    how_many = size(campaign, read_spread(read, frame), frame)
    found = compare_layouts(
        frame,
        [StratumCount(s.stratum, s.planned, 0) for s in how_many.strata],
        seed=campaign.draw.seed,
        design=campaign.design[0].id,
        minimum_spacing_m=campaign.design[0].minimum_spacing_m,
    )
    if as_json:
        print_json({"seed": campaign.draw.seed, "layouts": found})
        return
    _print_comparison(found, campaign.draw.seed, quiet=quiet)


def _print_comparison(found: Sequence["Evenness"], seed: int, *, quiet: bool) -> None:
    drawn = [layout for layout in found if not layout.problem]
    if drawn:
        best = min(drawn, key=lambda layout: layout.farthest_m)
        click.echo(
            wrapped(
                f"Here {best.layout} leaves the smallest gap: no spot lies farther than "
                f"{best.farthest_m:.3g} m from one of its {best.locations} locations."
            )
        )
    if not quiet:
        click.echo()
        head = ("layout", "locations", "closest pair", "to the nearest", "largest gap")
        rows = [
            (
                layout.layout,
                str(layout.locations),
                f"{layout.closest_m:.1f} m",
                f"{layout.typical_m:.1f} m",
                f"{layout.farthest_m:.1f} m",
            )
            for layout in drawn
        ]
        for line in _columns([head, *rows], flush_right=4):
            click.echo(line)
        say()
        say(
            wrapped(
                f"One draw each, seed {seed}. To the nearest: half of the locations have their "
                "nearest neighbour closer. Largest gap: the farthest that a spot lies from its "
                "nearest location. A grid lies evenly, but its interval gets no credit for that."
            )
        )
    for layout in found:
        if layout.problem:
            say(wrapped(f"{layout.layout} was not drawn: {layout.problem}"))
