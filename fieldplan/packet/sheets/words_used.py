"""Words of the trade for readers from outside: a gloss at the first mention, a list at the end."""

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, fields, is_dataclass, replace

from fieldplan.base.document import Block, Bullets, Facts, Figure, Heading, Paragraph


@dataclass(frozen=True)
class Term:
    """A word, how to find it, what stands after its first mention, and what the list says.

    ``gloss`` is a template of ``re.sub`` for ``mention``, or for ``pattern`` where that is empty;
    without a gloss the list alone explains the word.
    """

    word: str
    pattern: str
    meaning: str
    gloss: str = ""
    mention: str = ""


TERMS = (
    Term("action level", r"\baction level\b", "the level that a mean is set against; who decides "
         "and by which rule is said where it stands"),
    Term("allocation, Neyman", r"\bNeyman\b", "how locations are shared between strata: more go "
         "to a stratum that is larger or more uneven"),
    Term("alternate", r"\balternates?\b", "a spare place, drawn with the others, visited only "
         "instead of one that cannot be sampled", r"\g<0> (spare, drawn in order)"),
    Term("assurance", r"\bassurance\b", "the chance that the number of results is enough to meet "
         "the target", r"\g<0> (the chance that the number is enough)"),
    Term("control sample", r"\bcontrol samples?\b", "a sample that checks the work of crew and "
         "laboratory and says nothing of the site"),
    Term("CV", r"\bCV\b", "coefficient of variation: the standard deviation as a share of the "
         "mean"),
    Term("degrees of freedom", r"\b[Dd]egrees of freedom\b", "how much is known of the spread: "
         "the more, the narrower the interval for the same results"),
    Term("floor", r"\bfloor\b", "the least number of locations that a stratum gets"),
    Term("half-width", r"\bhalf-width\b", "the distance from the mean to either end of its "
         "interval"),
    Term("interval", r"\d % (?:two-sided )?interval\b", "a range round the mean found; in the long "
         "run the stated share of such ranges holds the true mean",
         r"\g<0> (a range made to hold the true mean in that share of campaigns)"),
    Term("limit, upper or lower", r"\d % (?:upper|lower) limit\b", "a value that the true mean "
         "lies below, or above, in the stated share of campaigns"),
    Term("near normal", r"\bnear normal\b", "spread evenly to both sides of the mean, with few "
         "values far out", r"\g<0>, that is spread evenly round their mean"),
    Term("non-detect", r"\bnon-detects?\b", "a result that the laboratory gives only as below its "
         "limit", r"\g<0> (below the laboratory's limit)"),
    Term("plain formula", r"\bplain formula\b", "the textbook formula for the number of results; "
         "it takes sigma as exactly known and is enough in about half of campaigns only",
         r"\1 (\2, as if the scatter were exactly known)", r"\b(the plain formula) \((\d+)\)"),
    Term("reporting limit", r"\b[Rr]eporting limit\b", "the smallest value that the laboratory "
         "reports as a number"),
    Term("sigma, s", r"\b[Ss]igma\b", "standard deviation of single results: how far they scatter "
         "round their mean; s is the one found in results",
         r"\g<0> (how far single results scatter)"),
    Term("skewness, G1", r"\bskewness\b|\bskewed\b", "how lopsided results are: 0 where they lie "
         "alike to both sides of the mean, above 0 where a few are very high"),
    Term("standard deviation", r"\b[Ss]tandard deviations?\b", "how far single results scatter "
         "round their mean"),
    Term("standard error", r"\bstandard error\b(?: of the mean)?", "how far a mean of so many "
         "results usually lies from the true one"),
    Term("stratum, strata", r"\bstratum\b|\bstrata\b", "a part of the site that is sampled on its "
         "own account", r"\g<0> (a part of the site sampled on its own)"),
    Term("targeted place", r"\b[Tt]argeted places?\b", "a place that somebody chose for a reason; "
         "it is reported and never enters the mean"),
    Term("weight", r"\b[Ww]eights?\b", "the share of the site that a stratum stands for in the "
         "mean"),
)  # fmt: skip
"""In the order of the alphabet."""


def explained(blocks: Sequence[Block]) -> list[Block]:
    """Explain each term where it first stands: what the answer uses, in a line below it.

    Parameters
    ----------
    blocks : sequence of Block
        Page one. Its answer keeps its words; paragraphs and lists get a few words in brackets.

    Returns
    -------
    list of Block
    """
    known: set[str] = set()
    found: list[Block] = []
    for block in blocks:
        if isinstance(block, Paragraph) and block.tone == "answer":
            found += [block, *_below(block.text, known)]
        elif isinstance(block, Paragraph) and block.tone == "plain":
            found.append(replace(block, text=_glossed(block.text, known)))
        elif isinstance(block, Bullets):
            items = tuple(_glossed(item, known) for item in block.items)
            found.append(replace(block, items=items))
        else:
            found.append(block)
    return found


def _below(answer: str, known: set[str]) -> list[Block]:
    """Say in a low voice what the words of an answer mean."""
    used = [
        term
        for term in TERMS
        if term.word not in known and term.word in _ANSWERS and re.search(term.pattern, answer)
    ]
    known.update(term.word for term in used)
    said = " ".join(f"{term.word[0].upper()}{term.word[1:]}: {term.meaning}." for term in used)
    return [Paragraph(said, tone="note")] if said else []


_ANSWERS = ("half-width", "interval", "standard error", "limit, upper or lower")


def _glossed(text: str, known: set[str]) -> str:
    """Put the gloss after the first mention of each term that nobody explained yet."""
    for term in TERMS:
        if not term.gloss or term.word in known:
            continue
        glossed = re.sub(term.mention or term.pattern, term.gloss, text, count=1)
        if glossed != text:
            known.add(term.word)
            text = glossed
    return text


def words_used(blocks: Sequence[Block]) -> list[Block]:
    """List the terms that a sheet uses, each with its meaning; nothing where it uses none."""
    text = "\n".join(words for block in blocks for words in _strings(block))
    rows = tuple((term.word, term.meaning) for term in TERMS if re.search(term.pattern, text))
    return [Heading("Words used"), Facts(rows)] if rows else []


def _strings(part: object) -> Iterator[str]:
    """Give all text of a block; of a figure its words alone."""
    if isinstance(part, str):
        yield part
    elif isinstance(part, Figure):
        yield part.caption
    elif isinstance(part, tuple | list):
        for entry in part:
            yield from _strings(entry)
    elif is_dataclass(part):
        for field in fields(part):
            yield from _strings(getattr(part, field.name))
