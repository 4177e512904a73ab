"""How locations are drawn, and the table of all of them."""

from fieldplan.base.document import Block, Bullets, Facts, Paragraph, Table
from fieldplan.campaign.model import DesignTable
from fieldplan.design.model import Location
from fieldplan.packet.sheets.plan_words import ALLOCATIONS, CLASSES, LAYOUTS, several_strata
from fieldplan.packet.sheets.sections import in_working
from fieldplan.packet.sheets.wording import number
from fieldplan.plan.model import Plan
from fieldplan.sizing.words import named


def _bounds(design: DesignTable) -> str:
    """Say the bounds of single strata, where they have some."""
    least = [f"{n} in {name}" for name, n in design.least.items()]
    most = [f"{n} in {name}" for name, n in design.most.items()]
    words = f", at least {named(least)}" if least else ""
    return words + (f", at most {named(most)}" if most else "")


def draw_blocks(plan: Plan) -> list[Block]:
    """Say which layout, why, from which seed, and in words how to draw it again."""
    from fieldplan.design.procedure import procedure_in_words

    design, draw = plan.campaign.design[0], plan.locations
    rows = [("Layout", LAYOUTS[design.layout])]
    if design.why:
        rows.append(("Why", design.why))
    if several_strata(plan):
        rows.append(
            (
                "Shared between strata",
                f"{ALLOCATIONS[design.allocation]}; at least {design.floor} each{_bounds(design)}",
            )
        )
    if design.layout == "even-spacing":
        rows.append(("Random starts", start_words(design)))
    if design.minimum_spacing_m:
        rows.append(("Minimum spacing", f"{number(design.minimum_spacing_m)} m"))
    rows += cell_rows(design)
    if draw.asked != draw.realised:
        rows.append(("Asked for and drawn", f"{draw.asked} and {draw.realised}"))
    rows += [
        ("Seed", f"{draw.seed}, with version {draw.version} of the drawing procedure"),
    ]
    blocks: list[Block] = [Facts(tuple(rows))]
    if draw.notes:
        blocks.append(Bullets(draw.notes))
    by_line = in_working("The drawing procedure, line by line")
    blocks.append(Paragraph(f"In words (line by line: {by_line}):"))
    return [
        *blocks,
        Bullets(tuple(procedure_in_words(plan.campaign, plan.locations)), numbered=True),
    ]


_VARIANCE = {
    ("pairs", 1): "from pairs of neighbouring cells, which usually overstates a little: the "
    "difference between the cells is in it",
    ("pairs", 2): "from the two results of each cell, which needs no model of the ground",
    ("covariance", 1): "that inside the cells by how results fade with distance, averaged over 126 "
    "curves by how likely the results make each; from pairs of neighbouring cells in a stratum of "
    "fewer than 20 or more than 400 results",
    ("covariance", 2): "that inside the cells by how results fade with distance, averaged over 126 "
    "curves by how likely the results make each; from the pairs in the cells in a stratum of fewer "
    "than 20 or more than 400 results",
}


def cell_rows(design: DesignTable) -> list[tuple[str, str]]:
    """Say how many locations a cell has and what the estimate will make of them."""
    if design.layout != "compact-strata":
        return []
    variance = _VARIANCE[design.variance, design.per_cell]
    return [
        ("Locations a cell", "1" if design.per_cell == 1 else "2 (3 in cell 1 where n is odd)"),
        (
            "Mean",
            "cell means weighed by the cells' exact areas; a cell without a result goes with the "
            "nearest cell that has one; an alternate counts in the cell in which it lies",
        ),
        ("Variance, fixed now", variance),
        (
            "Inclusion",
            "locations in the cell over its area, nearly equal between the cells of a stratum; "
            "the list of locations has it place by place (office folder)",
        ),
    ]


def start_words(design: DesignTable) -> str:
    """Say how many starts there are and what the estimate will make of them."""
    if design.starts == 1:
        return (
            "1; a standard error cannot be had from a single start, so that the formula for random "
            "places is used, without credit for the spacing"
        )
    return (
        f"{design.starts}, independent; the standard error comes from how their means differ, with "
        f"{design.starts - 1} degrees of freedom a stratum"
    )


def location_blocks(plan: Plan) -> list[Block]:
    """Say how many were asked for and drawn, set every location, and explain the columns."""
    draw = plan.locations
    return [
        Facts((("Asked for and drawn", f"{draw.asked} and {draw.realised}"),)),
        location_table(plan),
        Paragraph(table_note(plan), tone="note"),
    ]


def location_table(plan: Plan) -> Table:
    """Set every location: class, stratum, order, coordinates, jars."""
    columns = [
        "Location",
        "Short name",
        "Class",
        "Stratum",
        "Branch",
        "Along, m",
        "Cell",
        "Order",
        "Latitude",
        "Longitude",
        "Jars",
    ]
    cells = any(place.cell for place in plan.locations.places)
    lines = plan.frame.kind == "line"
    kept = [True, True, True, several_strata(plan), lines, lines, cells, True, True, True, True]
    rows = [location_row(plan, place) for place in plan.locations.places]
    return Table(
        tuple(c for c, keep in zip(columns, kept, strict=True) if keep),
        tuple(tuple(c for c, keep in zip(row, kept, strict=True) if keep) for row in rows),
        numeric=(
            *(["Along, m"] if lines else []),
            *(["Cell"] if cells else []),
            "Order",
            "Latitude",
            "Longitude",
            "Jars",
        ),
    )


def location_row(plan: Plan, place: Location) -> tuple[str, ...]:
    """Set one location."""
    return (
        place.location_id,
        place.short_name,
        place.location_class,
        place.stratum,
        place.branch,
        "–" if place.along_m is None else f"{place.along_m:.2f}",
        str(place.cell or "–"),
        str(place.list_order) if place.list_order else "–",
        f"{place.latitude:.7f}",
        f"{place.longitude:.7f}",
        str(len(plan.samples.at(place.location_id))),
    )


def table_note(plan: Plan) -> str:
    """Explain the columns."""
    classes = {place.location_class for place in plan.locations.places}
    meanings = "; ".join(f"{name}: {CLASSES[name]}" for name in CLASSES if name in classes)
    along = (
        " Along is the distance along the branch from its start, parts left out included."
        if plan.frame.kind == "line"
        else ""
    )
    return (
        f"Coordinates are degrees on WGS 84.{along} {meanings}. Order is the order of drawing "
        "within the stratum; alternates are used in that order. A jar is one sample; duplicates "
        "are among them. UTM and degrees-minutes-seconds are in the crew's CSV file; the map to "
        "scale is in folder crew."
    )
