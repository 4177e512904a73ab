"""Jars labelled under another revision of the plan: their results are none of this packet's."""

from collections.abc import Iterable, Iterator, Sequence

from fieldplan.lab.model import LabRow
from fieldplan.lab.words import listed
from fieldplan.plan.model import Plan
from fieldplan.returns.ids import plain_id
from fieldplan.samples.ids import revision_of


def other_revision(plan: Plan, written: str) -> str:
    """Name the revision of this plan, other than its own, that gave a sample id.

    Parameters
    ----------
    plan : Plan
    written : str
        As the crew or the laboratory wrote it.

    Returns
    -------
    str
        Such as ``HL-r02``; empty where the id is one of the plan (a well may be called so), or
        none that can be told.
    """
    name = plain_id(written)
    revision = revision_of(name, plan.campaign.prefix)
    if revision is None or revision == plan.revision:
        return ""
    known = {sample.sample_id for sample in plan.samples.samples}
    if name in known | {place.location_id for place in plan.locations.places}:
        return ""
    return f"{plan.campaign.plan.id}-r{revision:02d}"


def of_other_revisions(plan: Plan, rows: Sequence[LabRow]) -> list[str]:
    """Refuse results of jars that another revision labelled.

    Parameters
    ----------
    plan : Plan
    rows : sequence of LabRow

    Returns
    -------
    list of str
        A sentence for each revision: under a new one a number may stand for another place.
    """
    ids = [(row.row, (row.sample_id, row.location_id)) for row in rows]
    return [
        f"laboratory file {sentence} Estimate with the packet of {name}, or ask which labels the "
        "jars carried."
        for name, sentence in told_apart(plan, ids)
    ]


def told_apart(plan: Plan, ids: Iterable[tuple[int, Sequence[str]]]) -> Iterator[tuple[str, str]]:
    """Name each other revision that labelled jars of a file, with a sentence on which they are.

    Parameters
    ----------
    plan : Plan
    ids : iterable of (int, sequence of str)
        Row number, and what in the row may be the id of a sample.
    """
    found: dict[str, list[tuple[int, str]]] = {}
    for number, texts in ids:
        named = [(other_revision(plan, text), text) for text in texts]
        name, written = next((pair for pair in named if pair[0]), ("", ""))
        if name:
            found.setdefault(name, []).append((number, written))
    for name, jars in sorted(found.items()):
        numbers = listed([str(number) for number, _ in jars], limit=4)
        named_ids = listed([f"'{written}'" for _, written in jars], limit=4)
        rows, belong = ("row", "belongs") if len(jars) == 1 else ("rows", "belong")
        yield (
            name,
            (
                f"{rows} {numbers}: {named_ids} {belong} to {name}; this packet is "
                f"{plan.revision_name}."
            ),
        )
