"""All words of a sheet as one text, read by type of block."""

from fieldplan.base.document import (
    Block,
    Bullets,
    Caution,
    Document,
    Facts,
    Figure,
    Heading,
    Paragraph,
    SignOff,
    Table,
    Verbatim,
    Working,
)


def words_of(document: Document) -> str:
    """Join every word that the sheet prints, block by block."""
    parts = [document.title, document.subtitle, document.status]
    parts += [text_of(block) for block in document.blocks]
    return "\n".join(parts)


def text_of(block: Block) -> str:
    """Read one block."""
    match block:
        case Heading(text=text) | Paragraph(text=text) | Verbatim(text=text):
            return text
        case Bullets(items=items) | SignOff(roles=items):
            return "\n".join(items)
        case Facts(rows=rows):
            return "\n".join(f"{label}: {value}" for label, value in rows)
        case Table():
            lines = [block.caption, " | ".join(block.columns)]
            return "\n".join(lines + [" | ".join(row) for row in block.rows])
        case Figure():
            return f"{block.caption}\n{block.alternative}"
        case Caution():
            return f"{block.topic} {block.because} {block.defers_to} {block.status}"
        case Working(steps=steps):
            return "\n".join(f"{s.meaning} {s.formula} {s.source}" for s in steps)
        case _:
            return ""


def headings_of(document: Document) -> list[str]:
    """List the headings of the first level, without their numbers."""
    found = [b.text for b in document.blocks if isinstance(b, Heading) and b.level == 1]
    return [text.partition(". ")[2] or text for text in found]
