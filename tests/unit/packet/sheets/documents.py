"""A document that holds every kind of block, and text that would do harm if it were markup."""

from fieldplan.base.document import (
    Bullets,
    Document,
    Facts,
    Figure,
    Heading,
    PageBreak,
    Paragraph,
    SignOff,
    Table,
    Verbatim,
    Working,
)
from tests.factories import make_cautions, make_size

HOSTILE = (
    r"""<b>bold</b> #eval("1") $x^2$ *star* _low_ ] } \ & "q" """
    r"""<script>alert(1)</script> @ref `raw` // c"""
)
SVG = (
    '<svg xmlns="http://www.w3.org/2000/svg" width="300" height="100" viewBox="0 0 300 100">'
    '<rect x="5" y="5" width="290" height="90" fill="none" stroke="#000"/></svg>'
)
WIDE = Table(
    (
        "location_id", "short_name", "class", "stratum", "latitude", "longitude", "easting",
        "northing", "utm_zone", "datum", "list_order", "inclusion_probability", "weight",
    ),
    tuple(
        (
            f"QF-A-{order:02d}", f"QFA{order:02d}", "alternate", "meadow by the river",
            "52.1234567", "-1.9012345", "712345.6", "5776543.2", "30U", "WGS 84", str(order),
            "0.0002381", "0.0785",
        )
        for order in range(1, 61)
    ),
    "Locations",
    ("latitude", "longitude", "easting", "northing", "list_order", "weight"),
)  # fmt: skip


def make_document(*, words: str = "plain words", status: str = "DRAFT") -> Document:
    """Every kind of block, with ``words`` in every field that a person can type into."""
    size = make_size()
    return Document(
        title=f"Sheet {words}",
        subtitle=f"Under {words}",
        plan_id="QF",
        revision_name="QF-r01",
        status=status,
        blocks=[
            Paragraph(f"Answer {words}", "answer"),
            Paragraph(f"Plain {words}"),
            Paragraph(f"Note {words}", "note"),
            Heading(f"Part {words}"),
            Heading(f"Small part {words}", 2),
            Facts((("Plan", "QF-r01"), (f"Label {words}", f"Value {words}"))),
            Bullets((f"Bullet {words}", "second")),
            Bullets((f"First {words}", "then"), numbered=True),
            Table(
                ("Stratum", f"Column {words}"), ((f"Cell {words}", "3"),), f"Caption {words}",
                (f"Column {words}",),
            ),
            Figure(SVG, f"Figure caption {words}", f"Alternative {words}"),
            *make_cautions(),
            Working(size.steps),
            Verbatim(f"for k in 1..n:\n    u = draw(k)  {words}"),
            PageBreak(),
            Heading("Places"),
            WIDE,
            SignOff(("Prepared by", f"Role {words}")),
        ],
    )  # fmt: skip
