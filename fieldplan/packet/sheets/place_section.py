"""How locations are drawn, and the table of all of them."""

from fieldplan.base.document import Block, Bullets, Facts, Paragraph, Table
from fieldplan.campaign.model import DesignTable
from fieldplan.design.model import Location
from fieldplan.packet.sheets.plan_words import ALLOCATIONS, CLASSES, LAYOUTS, several_strata
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
    if design.minimum_spacing_m:
        rows.append(("Minimum spacing", f"{number(design.minimum_spacing_m)} m"))
    rows += [
        ("Seed", str(draw.seed)),
        ("Version of the drawing procedure", str(draw.version)),
        ("Asked for and drawn", f"{draw.asked} and {draw.realised}"),
    ]
    blocks: list[Block] = [Facts(tuple(rows))]
    if draw.notes:
        blocks.append(Bullets(draw.notes))
    blocks.append(Paragraph("In words (annex B has it line by line):"))
    return [
        *blocks,
        Bullets(tuple(procedure_in_words(plan.campaign, plan.locations)), numbered=True),
    ]


def location_blocks(plan: Plan) -> list[Block]:
    """Set every location, and explain the columns."""
    return [location_table(plan), Paragraph(table_note(plan), tone="note")]


def location_table(plan: Plan) -> Table:
    """Set every location: class, stratum, order, coordinates, jars."""
    columns = [
        "Location",
        "Short name",
        "Class",
        "Stratum",
        "Order",
        "Latitude",
        "Longitude",
        "Jars",
    ]
    kept = [True, True, True, several_strata(plan), True, True, True, True]
    rows = [location_row(plan, place) for place in plan.locations.places]
    return Table(
        tuple(c for c, keep in zip(columns, kept, strict=True) if keep),
        tuple(tuple(c for c, keep in zip(row, kept, strict=True) if keep) for row in rows),
        numeric=("Order", "Latitude", "Longitude", "Jars"),
    )


def location_row(plan: Plan, place: Location) -> tuple[str, ...]:
    """Set one location."""
    return (
        place.location_id,
        place.short_name,
        place.location_class,
        place.stratum,
        str(place.list_order) if place.list_order else "–",
        f"{place.latitude:.7f}",
        f"{place.longitude:.7f}",
        str(len(plan.samples.at(place.location_id))),
    )


def table_note(plan: Plan) -> str:
    """Explain the columns."""
    classes = {place.location_class for place in plan.locations.places}
    meanings = "; ".join(f"{name}: {CLASSES[name]}" for name in CLASSES if name in classes)
    return (
        f"Coordinates are degrees on WGS 84. {meanings}. Order is the order of drawing within the "
        "stratum; alternates are used in that order. A jar is one sample; duplicates are among "
        "them. UTM and degrees-minutes-seconds are in the crew's CSV file; the map to scale is in "
        "folder crew."
    )
