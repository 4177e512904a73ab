"""What stands beside the number: a sentence on the sheet, its numbers in the working."""

from collections.abc import Sequence

from fieldplan.base.document import Block, Bullets, Facts, Heading, Paragraph, Table, Working
from fieldplan.packet.sheets.amounts import rounded
from fieldplan.sizing.model import Amount, Finding


def finding_blocks(findings: Sequence[Finding], *, answered: bool = False) -> list[Block]:
    """Set each finding's answer, its picture, its warnings; those of words alone stand together.

    Parameters
    ----------
    findings : sequence of Finding
    answered : bool
        Whether the answer of the first stands on page one and is not said again.
    """
    plain: list[tuple[str, str]] = []
    shown: list[Block] = []
    for position, finding in enumerate(findings):
        answer = "" if answered and position == 0 else finding.answer
        if finding.picture is None and not finding.warnings:
            plain += [(finding.title, answer)] if answer else []
            continue
        shown += [Heading(finding.title, level=2), *([Paragraph(answer)] if answer else [])]
        if finding.picture is not None:
            from fieldplan.packet.charts.finding_picture import finding_picture

            shown.append(finding_picture(finding.picture))
        if finding.warnings:
            shown.append(Bullets(finding.warnings))
    beside: list[Block] = [Heading("Beside the number", level=2), Facts(tuple(plain))]
    return [*(beside if plain else []), *shown]


def finding_details(findings: Sequence[Finding]) -> list[Block]:
    """Set the numbers, the table, the working, the assumptions and sources of findings.

    Parameters
    ----------
    findings : sequence of Finding
    """
    blocks: list[Block] = []
    for finding in findings:
        parts = _parts(finding)
        if parts:
            blocks += [Heading(finding.title, level=2), *parts]
    return blocks


def _parts(finding: Finding) -> list[Block]:
    blocks: list[Block] = []
    if finding.amounts:
        blocks.append(Facts(tuple((a.meaning, amount_words(a)) for a in finding.amounts)))
    if finding.columns:
        blocks.append(Table(finding.columns, finding.rows, numeric=finding.columns[1:]))
    if finding.steps:
        blocks.append(Working(finding.steps))
    if finding.assumptions:
        blocks.append(Bullets(finding.assumptions))
    if finding.sources:
        blocks.append(Paragraph("Sources: " + "; ".join(finding.sources) + ".", tone="note"))
    return blocks


def amount_words(amount: Amount) -> str:
    """Write one number with its unit; a dash where there is none.

    Examples
    --------
    >>> amount_words(Amount("spacing_m", "Spacing", 17.94, "m"))
    '17.9 m'
    """
    if amount.value is None:
        return "–"
    whole = isinstance(amount.value, int)
    return f"{amount.value if whole else rounded(float(amount.value))} {amount.unit}".rstrip()
