"""The results sheet: the mean and its interval first, then how it came about."""

from fieldplan.base.document import (
    Block,
    Bullets,
    Document,
    Heading,
    PageBreak,
    Paragraph,
    SignOff,
    Working,
)
from fieldplan.estimate.model import Answers, Estimate
from fieldplan.estimate.sentences import analyte_name, interval_in_words
from fieldplan.packet.results_origin import ResultsOrigin
from fieldplan.packet.sheets.amounts import listed
from fieldplan.packet.sheets.plan_sheet import subtitle
from fieldplan.packet.sheets.results_sources import (
    earlier_blocks,
    earlier_sentence,
    order_blocks,
    source_blocks,
)
from fieldplan.packet.sheets.results_tables import (
    change_blocks,
    degrees_words,
    stratum_table,
)
from fieldplan.packet.sheets.returned import (
    confirmed_blocks,
    field_blocks,
    left_out_blocks,
    location_table,
    match_sentence,
)
from fieldplan.packet.sheets.rules import rules_blocks
from fieldplan.packet.sheets.words_used import explained, words_used
from fieldplan.plan.model import Plan

_NO_ORIGIN = ResultsOrigin()

TRUST = "How far the interval can be trusted"
FACTORS = "Achieved is "
"""How the sentence opens that splits planned against achieved into factors."""


def results_sheet(plan: Plan, answers: Answers, *, origin: ResultsOrigin = _NO_ORIGIN) -> Document:
    """Compose the results sheet of the main analyte.

    Parameters
    ----------
    plan : Plan
        Read from the packet.
    answers : Answers
        Other analytes are named with their sentence; their sheets are their own.
    origin : ResultsOrigin
        Files handed in, the laboratory's report number, earlier estimates.

    Returns
    -------
    Document
        "Changes made after results" is always there, even when there were none.
    """
    estimate = answers.main
    besides = [("Other analytes of the campaign", other_blocks(answers))]
    sections: tuple[tuple[str, list[Block]], ...] = (
        ("Planned against achieved", [Bullets(said_of_difference(estimate))]),
        *(besides if answers.sentences else []),
        ("By stratum", [stratum_table(plan, estimate)]),
        (TRUST, [Paragraph(estimate.coverage_sentence)]),
        ("Location by location", location_blocks(plan, estimate)),
        ("What happened in the field", field_blocks(plan, estimate.returns)),
        (
            "Changes made after results",
            [
                *change_blocks(estimate),
                *order_blocks(plan, estimate),
                *earlier_blocks(estimate, origin),
            ],
        ),
        ("The working", working_blocks(estimate)),
        ("Rules on record", rules_blocks(plan.campaign.rules)),
        ("For the report", report_blocks(plan, estimate)),
        ("What these results were made from", source_blocks(plan, estimate, origin=origin)),
    )
    sections = tuple(entry for entry in sections if entry[1] != [Paragraph("")])
    trust = 1 + [title for title, _ in sections].index(TRUST) if estimate.coverage_sentence else 0
    page_one = answer_blocks(plan, estimate, origin=origin, trust=trust)
    blocks: list[Block] = [*explained(page_one), PageBreak()]
    for number, (title, content) in enumerate(sections, start=1):
        blocks += [Heading(f"{number}. {title}"), *content]
    blocks += [Heading(f"{len(sections) + 1}. Sign-off"), sign_off(plan)]
    blocks += words_used(blocks)
    return Document(
        title=f"{results_of(plan, estimate)}: {plan.campaign.plan.title}",
        subtitle=subtitle(plan, "Results sheet"),
        plan_id=plan.campaign.plan.id,
        revision_name=plan.revision_name,
        status=plan.status,
        blocks=tuple(blocks),
    )


def results_of(plan: Plan, estimate: Estimate) -> str:
    """Open the title; an analyte that the plan's own title may not name is named."""
    if estimate.analyte == plan.campaign.deciding_analyte.id:
        return "Results"
    return f"Results for {analyte_name(plan, estimate.analyte)}"


def other_blocks(answers: Answers) -> list[Block]:
    """Say the answer for each other analyte, and where its sheet is."""
    blocks: list[Block] = [Bullets(answers.sentences)]
    if answers.others:
        sheets = [f"results_sheet-{other.analyte}" for other in answers.others]
        blocks.append(Paragraph(f"In full beside this sheet: {listed(sheets)}.", tone="note"))
    return blocks


def said_of_difference(estimate: Estimate) -> tuple[str, ...]:
    """Leave the split into factors to the working."""
    return tuple(line for line in estimate.why_different if not line.startswith(FACTORS))


def answer_blocks(
    plan: Plan, estimate: Estimate, *, origin: ResultsOrigin, trust: int
) -> list[Block]:
    """Compose page one: the answer in sentences, each once, and its figure."""
    from fieldplan.packet.charts import interval_figure

    analyte = plan.campaign.analyte_called(estimate.analyte)
    figure = interval_figure(estimate, name=analyte.label, action_level=analyte.action_level)
    earlier = earlier_sentence(origin)
    before = [Paragraph(earlier)] if earlier else []
    return [*answer_words(estimate), *before, figure, *after_figure(estimate, trust)]


def answer_words(estimate: Estimate) -> list[Block]:
    """Say the answer, the level and the population, each once."""
    first, *others = estimate.sentences
    blocks: list[Block] = [Paragraph(first, tone="answer")]
    said = [*others, estimate.level_sentence, estimate.population_sentence]
    for sentence in dict.fromkeys(said):
        if sentence and sentence != first:
            changed = sentence.startswith("CHANGED AFTER RESULTS")
            blocks.append(Paragraph(sentence, tone="answer" if changed else "plain"))
    return blocks


def after_figure(estimate: Estimate, trust: int) -> list[Block]:
    """Say where it stands how far the interval can be trusted, and the kind not declared."""
    blocks: list[Block] = []
    if trust and "lies outside that class" in estimate.coverage_sentence:
        blocks.append(
            Paragraph(
                "These results are more uneven than the class for which the plan declares its "
                f"confidence: section {trust} says what that means."
            )
        )
    elif trust:
        line = "How far such an interval can be trusted where results are uneven"
        blocks.append(Paragraph(f"{line}: section {trust}."))
    return [*blocks, Paragraph(other_interval(estimate), tone="note")]


def other_interval(estimate: Estimate) -> str:
    """Say the kind of interval that was not declared, so that nobody has to work it out."""
    words = interval_in_words(estimate.other_interval, estimate.unit)
    return f"Not the declared answer, for those who ask: {words}."


def location_blocks(plan: Plan, estimate: Estimate) -> list[Block]:
    """Set every result as reported and what became of it."""
    return [
        Paragraph(match_sentence(estimate.returns)),
        location_table(plan, estimate.returns),
        Paragraph(
            "As reported is the laboratory's cell, untouched. A value with non-detects in it is "
            "shown with them at half their limit; page one says what 0 and the limit would give.",
            tone="note",
        ),
        *confirmed_blocks(plan, estimate.returns),
        *left_out_blocks(plan, estimate.returns),
    ]


def working_blocks(estimate: Estimate) -> list[Block]:
    """Set the method in words and the arithmetic."""
    blocks: list[Block] = [Paragraph(estimate.mean.method)]
    if estimate.mean.caution:
        blocks.append(Paragraph(estimate.mean.caution))
    blocks += [Paragraph(line) for line in estimate.why_different if line.startswith(FACTORS)]
    freedom = degrees_words(estimate.mean.degrees_of_freedom)
    return [*blocks, Paragraph(f"Degrees of freedom: {freedom}."), Working(estimate.steps)]


def report_blocks(plan: Plan, estimate: Estimate) -> list[Block]:
    """Set the results paragraph."""
    from fieldplan.estimate.text import results_paragraph

    return [Paragraph("Ready to paste:"), Paragraph(results_paragraph(plan, estimate))]


def sign_off(plan: Plan) -> SignOff:
    """Leave blanks for those who prepare, review and decide."""
    decides = plan.campaign.plan.decides
    return SignOff(
        (
            "Prepared by",
            "Data reviewed by",
            f"Accepted by ({decides})" if decides else "Accepted by",
        )
    )
