"""An analyte is called what its author typed: "As" is arsenic, "as" is a word."""

from dataclasses import replace

import pytest

from fieldplan.base.document import Document, Figure
from fieldplan.estimate import estimate_all
from fieldplan.estimate.text import results_paragraph
from fieldplan.packet.maps.results import results_content
from fieldplan.packet.sheets.plan_sheet import plan_sheet
from fieldplan.packet.sheets.results_sheet import results_sheet
from fieldplan.packet.sheets.working_sheet import working_sheet
from fieldplan.returns.several import Received
from tests.factories import make_plan, make_returns
from tests.unit.packet.sheet_text import words_of

NAMES = ("Arsenic (As)", "Nitrate as N", "2,4-D")


def words_and_figures(sheet: Document) -> str:
    """Give all words of a sheet, with those under and behind its figures."""
    figures = [block for block in sheet.blocks if isinstance(block, Figure)]
    said = [f"{figure.caption} {figure.alternative}" for figure in figures]
    return "\n".join([words_of(sheet), *said])


@pytest.mark.parametrize("name", NAMES)
def test_every_page_calls_an_analyte_what_its_author_typed(name: str) -> None:
    """Neither its id nor the name in another case; the id here is made to be found out."""
    plan = make_plan()
    (lead,) = plan.campaign.analyte
    renamed = plan.campaign.model_copy(
        update={"analyte": (lead.model_copy(update={"name": name}),)}
    )
    plan = replace(plan, campaign=renamed)
    answers = estimate_all(plan, Received(make_returns(), ()))
    pages = {
        "plan sheet": words_and_figures(plan_sheet(plan)) + words_and_figures(working_sheet(plan)),
        "results sheet": words_and_figures(results_sheet(plan, answers)),
        "results map": results_content(plan, answers.main).title,
        "report": results_paragraph(plan, answers.main),
    }
    for page, words in pages.items():
        said = words.replace(plan.campaign.plan.title, "").replace("lead.csv", "")
        assert name in said, page
        assert "lead" not in said.replace("field lead", "").replace("Field lead", ""), page
        assert name.lower() not in said, page
