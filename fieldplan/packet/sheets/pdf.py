"""Set a sheet as PDF through typst: facts go over as JSON, never as markup."""

import importlib.util
import json
import tempfile
from collections.abc import Mapping
from importlib import resources
from pathlib import Path
from typing import Any, Literal

from fieldplan.base.document import Block, Document, Figure, Working
from fieldplan.packet.sheets.wording import printable, step_lines


def set_pdf(document: Document, *, paper: Literal["A4", "Letter"]) -> bytes:
    """Set a document as pages.

    Parameters
    ----------
    document : Document
        What to set. All of its text is printed as typed: markup in it stays inert.
    paper : str
        ``A4`` or ``Letter``.

    Returns
    -------
    bytes
        A PDF: status at the head of every page, revision and ``page n of m`` at its foot. The
        same document gives the same bytes.
    """
    import typst

    with tempfile.TemporaryDirectory(prefix="fieldplan-") as name:
        folder = Path(name)
        facts = sheet_facts(document, paper)
        for number, figure in enumerate(_figures(document), start=1):
            (folder / f"figure-{number}.svg").write_text(figure.svg, encoding="utf-8")
        (folder / "sheet.json").write_text(json.dumps(facts), encoding="utf-8")
        sheet = folder / "sheet.typ"
        sheet.write_bytes(resources.files(__package__).joinpath("sheet.typ").read_bytes())
        pages = typst.compile(
            str(sheet),
            root=str(folder),
            font_paths=[str(path) for path in _font_folders()],
            ignore_system_fonts=True,
            format="pdf",
        )
    return bytes(pages)


def _font_folders() -> list[Path]:
    """Find the faces that matplotlib carries: they have signs that typst's own faces lack."""
    found = importlib.util.find_spec("matplotlib")
    if found is None or found.origin is None:
        return []
    folder = Path(found.origin).parent / "mpl-data" / "fonts" / "ttf"
    return [folder] if folder.is_dir() else []


def _figures(document: Document) -> list[Figure]:
    """List the drawings in the order of their numbers."""
    return [block for block in document.blocks if isinstance(block, Figure)]


def sheet_facts(document: Document, paper: str) -> dict[str, Any]:
    """Turn a document into plain values for the template."""
    serial = iter(range(1, len(document.blocks) + 1))
    return {
        "title": printable(document.title),
        "head": _cut(printable(document.title), 60),
        "subtitle": printable(document.subtitle),
        "revision": printable(document.revision_name),
        "status": printable(document.status),
        "lying": document.lying,
        "paper": {"A4": "a4", "Letter": "us-letter"}[paper],
        "blocks": _led([_block(block, serial) for block in document.blocks]),
    }


def _cut(text: str, most: int) -> str:
    """Cut the title that runs at the head of each page; it stands whole on the first."""
    line = " ".join(text.split())
    return line if len(line) <= most else line[: most - 1].rstrip() + "…"


def _led(blocks: list[dict[str, Any]]) -> list[dict[str, Any]]:
    """Hand each table the heading and sentences that lead into it, so that they turn together."""
    led: list[dict[str, Any]] = []
    for block in blocks:
        if block["kind"] == "Table":
            start = len(led)
            while start and led[start - 1]["kind"] in {"Heading", "Paragraph"}:
                start -= 1
            while start < len(led) and led[start]["kind"] == "Paragraph":
                start += 1
            block["lead"] = led[start:]
            del led[start:]
        led.append(block)
    return led


def _block(block: Block, serial: Any) -> dict[str, Any]:
    """Turn one block into its kind and its fields."""
    if isinstance(block, Figure):
        fields: Mapping[str, Any] = {
            "file": f"figure-{next(serial)}.svg",
            "caption": block.caption,
            "alternative": block.alternative,
            "width_mm": block.width_mm,
        }
    elif isinstance(block, Working):
        fields = {"steps": [vars(step_lines(step)) for step in block.steps]}
    else:
        fields = vars(block)
    return {"kind": type(block).__name__} | {key: _plain(value) for key, value in fields.items()}


def _plain(value: Any) -> Any:
    """Make tuples lists and text printable, all the way down."""
    if isinstance(value, str):
        return printable(value)
    if isinstance(value, list | tuple):
        return [_plain(entry) for entry in value]
    if isinstance(value, Mapping):
        return {key: _plain(entry) for key, entry in value.items()}
    return value
