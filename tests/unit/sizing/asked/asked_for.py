"""Ask a question of bare parts in tests."""

from typing import Any

from fieldplan.campaign.model import Objective
from fieldplan.campaign.questions import MODULES, table_of
from fieldplan.sizing.asked.model import Answered, Asked
from fieldplan.sizing.model import Finding
from fieldplan.sizing.question import Part, Question
from tests.factories import make_campaign

ONE = (Part("site", 1.0, 20.0, results=8),)


def asked_for(
    question: str, *, parts: tuple[Part, ...] = ONE, known: bool = True, **more: Any
) -> Asked:
    """Ask about lead against the 150 mg/kg of the made campaign; words fill the table."""
    name = table_of(question)
    table = Objective.model_fields[name].annotation.__args__[0]  # type: ignore[union-attr]
    words = ("interval", "confidence", "allocation", "locations", "census", "mean", "grid")
    kind = {key: more.pop(key) for key in words if key in more and key not in table.model_fields}
    objective = Objective(analyte="lead", question=question, **{name: table(**more)})
    asking = Question(parts, "standard_error", 1.0, unit="mg/kg", **kind)
    assert question in MODULES
    return Asked(make_campaign(objective=(objective,)), objective, asking, sigma_known=known)


def amount(found: Answered | Finding, name: str) -> Any:
    """Give one number of a finding."""
    finding = found.finding if isinstance(found, Answered) else found
    return next(entry.value for entry in finding.amounts if entry.name == name)


def listed(*sizes: int, sigma: float = 20.0) -> tuple[Part, ...]:
    """Strata of a list, with weights by their sizes."""
    total = sum(sizes)
    return tuple(
        Part(f"list {k}", size / total, sigma, population=size)
        for k, size in enumerate(sizes, start=1)
    )
