"""Precision against money over all designs that the campaign's data allow."""

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, replace
from typing import Literal

from fieldplan.sizing.asked.model import Asked
from fieldplan.sizing.frontier import (
    REACH,
    PricedDesign,
    Wanted,
    cheapest,
    efficient,
    most_precise,
    wanted_of,
)
from fieldplan.sizing.frontier_composites import INCREMENTS
from fieldplan.sizing.frontier_kinds import Kind, kinds_of
from fieldplan.sizing.model import Amount, Finding, Picture, Series, Size
from fieldplan.sizing.precision import Precision
from fieldplan.sizing.widened import by_student
from fieldplan.sizing.words import counted, figure, listed, with_unit

Style = Literal["line", "hollow", "points"]

ROWS = 12
"""Most designs in the table."""

COMPOSITES = (
    "Berthouex & Brown 2002, Statistics for Environmental Engineers, 2nd ed., ch. 25 (composites)"
)
SOURCES = (
    "Cochran 1977, Sampling Techniques, 3rd ed., secs. 5.5 to 5.9 (strata) and ch. 12 (readings) "
    "(from memory)",
)


@dataclass(frozen=True)
class _Compared:
    """Every design traced, the plan's own, and what is looked for."""

    unit: str
    currency: str
    wanted: Wanted
    budget: float
    own: PricedDesign
    rows: dict[str, list[PricedDesign]]
    goal: dict[str, PricedDesign]
    paid: dict[str, PricedDesign]

    @property
    def designs(self) -> list[PricedDesign]:
        """All of them, each kind's best for target and money included."""
        traced = [design for row in self.rows.values() for design in row]
        return [*traced, *self.goal.values(), *self.paid.values()]

    def shown(self, designs: Iterable[PricedDesign]) -> list[PricedDesign]:
        """Leave out what lies beyond the finest precision that every kind is traced to.

        Each kind ends at a whole number a little beyond it, and the last of those is beaten by
        none for want of a rival.
        """
        finest = self.wanted.value / REACH
        return [design for design in designs if self.wanted.of(design) >= finest]

    @property
    def best(self) -> list[PricedDesign]:
        """Those that no other beats, cheapest first."""
        return self.shown(efficient(self.designs))

    def money(self, amount: float) -> str:
        """Write an amount of money."""
        return with_unit(f"{amount:.0f}", self.currency)

    def precision(self, value: float) -> str:
        """Write the measure that is compared."""
        word = "standard error" if self.wanted.measure == "standard_error" else "half-width"
        return f"{word} of {with_unit(figure(value), self.unit)}"


def finding(asked: Asked, size: Size) -> Finding | None:
    """Set the plan's design beside the others that the data allow.

    Parameters
    ----------
    asked : Asked
    size : Size

    Returns
    -------
    Finding or None
        None without prices or sigma, for a census, and where something else than the precision
        of one mean is asked: other designs would not keep the targets of several analytes. None
        too for a half-width of the skew-widened interval, known for one design only.
    """
    question = asked.question
    if question.widened and question.target_half_width is not None:
        return None
    if question.widened:
        return finding(replace(asked, question=by_student(question)), size)
    prices = question.prices
    if prices is None or question.census or not asked.sigma_known or size.question != "mean":
        return None
    takes_all = question.takes_all([entry.needed for entry in size.strata])
    if question.also:
        return None
    if takes_all or prices.of_a_visit + prices.of_a_result <= 0:
        return None
    compared = _compared(asked, size)
    columns, rows = _table(compared)
    return Finding(
        topic="frontier",
        title="Precision for the money",
        answer=_answer(compared),
        amounts=_amounts(compared),
        columns=columns,
        rows=rows,
        assumptions=_assumptions(asked, size, compared),
        sources=(*SOURCES, *((COMPOSITES,) if "composites" in compared.rows else ())),
        picture=_picture(compared) if len(compared.rows) > 1 and compared.best else None,
    )


def _compared(asked: Asked, size: Size) -> _Compared:
    question, kinds = asked.question, kinds_of(asked)
    needed = tuple(entry.needed for entry in size.strata)
    wanted = wanted_of(question, needed)
    budget = question.value if question.target == "budget" else size.cost or 0.0
    return _Compared(
        unit=question.unit,
        currency=question.prices.currency if question.prices else "",
        wanted=wanted,
        budget=budget,
        own=_own(asked, size, needed),
        rows={kind.label: kind.row(wanted) for kind in kinds},
        goal=_best_of(kinds, lambda kind: kind.cheapest(wanted)),
        paid=_best_of(kinds, lambda kind: kind.most_precise(budget)),
    )


def _own(asked: Asked, size: Size, needed: tuple[int, ...]) -> PricedDesign:
    """Price the plan as it stands."""
    question, precision = asked.question, Precision(asked.question)
    days = question.prices.crew_days(size.planned + question.targeted) if question.prices else 0
    own_places = question.increments > 1 and not question.one_place
    return PricedDesign(
        "this plan",
        counted(size.needed, "result"),
        results=size.needed,
        locations=size.planned * (question.increments if own_places else 1),
        standard_error=precision.standard_error(needed),
        half_width=precision.half_width(needed),
        cost=size.cost or 0.0,
        crew_days=days,
    )


def _best_of(
    kinds: Sequence[Kind], best: Callable[[Kind], PricedDesign | None]
) -> dict[str, PricedDesign]:
    """Take each kind's best; a kind that has none is left out."""
    found = {kind.label: best(kind) for kind in kinds}
    return {label: design for label, design in found.items() if design is not None}


def _taken(design: PricedDesign) -> str:
    return f"{design.kind} ({design.words})"


def _answer(compared: _Compared) -> str:
    """Say what is cheapest and what most precise; where there is one kind, what money does."""
    if len(compared.rows) == 1:
        return _one_kind(compared)
    best = cheapest(compared.goal.values(), compared.wanted)
    finest = most_precise(compared.paid.values(), compared.budget)
    lines = (_cheapest_words(compared, best), _finest_words(compared, finest))
    return " ".join(line for line in lines if line)


def _one_kind(compared: _Compared) -> str:
    """Say what money within a quarter, less and more, would do."""
    (row,) = compared.rows.values()
    known = [most_precise(row, factor * compared.own.cost) for factor in (0.75, 1.25)]
    lines = [
        f"{compared.money(design.cost)} a {compared.precision(compared.wanted.of(design))}"
        for design in known
        if design is not None
    ]
    reached = compared.precision(compared.wanted.of(compared.own))
    start = f"This plan buys a {reached} for {compared.money(compared.own.cost)}"
    return f"{start}; {listed(lines)}." if lines else f"{start}."


def _cheapest_words(compared: _Compared, best: PricedDesign | None) -> str:
    """Say which design reaches the plan's precision for least."""
    aim, own = compared.precision(compared.wanted.value), compared.money(compared.own.cost)
    if best is None:
        return f"No design that the data allow reaches a {aim}."
    if best.cost > compared.own.cost - 0.5:
        return f"None of the designs that the data allow reaches a {aim} for less than {own}."
    return (
        f"Of the designs that the data allow, the cheapest with a {aim} is {_taken(best)} for "
        f"{compared.money(best.cost)}; this plan costs {own}."
    )


def _finest_words(compared: _Compared, finest: PricedDesign | None) -> str:
    """Say which design is the most precise for the money."""
    money = compared.money(compared.budget)
    if finest is None:
        return ""
    reached = compared.precision(compared.wanted.of(finest))
    if compared.wanted.of(finest) >= compared.wanted.of(compared.own) * 0.999:
        return f"For {money} none is more precise than this plan."
    return f"For {money} the most precise is {_taken(finest)}, with a {reached}."


def _amounts(compared: _Compared) -> tuple[Amount, ...]:
    wanted, money = compared.wanted, compared.currency
    found = [
        Amount(f"compared_{wanted.measure}", "Precision that is compared", wanted.value,
               compared.unit),
        Amount("budget", "Money that is compared", compared.budget, money),
        Amount("designs", "Designs priced", len(compared.designs)),
    ]  # fmt: skip
    for label, design in compared.goal.items():
        slug = "".join(c if c.isalnum() else "_" for c in label.lower()).replace("__", "_")
        meaning = f"Cheapest at that precision, {label}: {design.words}"
        found.append(Amount(f"cost_{slug}", meaning, design.cost, money))
    return tuple(found)


def _table(compared: _Compared) -> tuple[tuple[str, ...], tuple[tuple[str, ...], ...]]:
    """List the designs that no other beats, cheapest first, and the plan among them."""
    best = compared.best
    step = max(1.0, (len(best) - 1) / (ROWS - 1))
    thinned = [best[round(k * step)] for k in range(ROWS) if round(k * step) < len(best)]
    asked = [
        cheapest(compared.goal.values(), compared.wanted),
        most_precise(compared.paid.values(), compared.budget),
    ]
    found = {**dict.fromkeys(thinned), **dict.fromkeys(d for d in asked if d), compared.own: None}
    rows = sorted(found, key=lambda d: (d.cost, d.kind))
    name = "SE" if compared.wanted.measure == "standard_error" else "±"
    columns = [
        "Design",
        "Results",
        "Locations",
        f"{name} {compared.unit}".strip(),
        f"Cost {compared.currency}".strip(),
    ]
    days = any(design.crew_days for design in rows)
    cells = [
        (
            design.kind,
            str(design.results),
            str(design.locations),
            figure(compared.wanted.of(design)),
            f"{design.cost:.0f}",
            *((str(design.crew_days),) if days else ()),
        )
        for design in rows
    ]
    return (*columns, *(["Crew-days"] if days else [])), tuple(cells)


def _assumptions(asked: Asked, size: Size, compared: _Compared) -> tuple[str, ...]:
    question = asked.question
    lines = [
        "All designs are priced with the same sigmas and prices, control samples, losses and "
        "targeted places included. The table holds those that no other beats, and this plan.",
    ]
    target = question.target_half_width or question.value
    if question.target != "budget" and compared.wanted.value < 0.999 * target:
        why = ""
        if question.assurance is not None:
            why = ", so that each keeps the target with about the chance that was asked for"
        lines.append(
            f"They are compared at what the {size.needed} results of this plan predict{why}."
        )
    if question.grid:
        lines.append("A grid is priced as random places are: its evenness earns no credit here.")
    if "places spread out" in compared.rows:
        laid = asked.campaign.design[0].layout in {"compact-strata", "balanced-list"}
        lines.append(
            "Places spread out, one in each of n compact parts, save what the positions of the "
            "pilot predict; --more space says how sure that is. This plan "
            + ("lays them so, and its n takes no credit." if laid else "does not lay them so.")
        )
    if "no strata" in compared.rows:
        lines.append(
            "Without strata sigma holds the differences between the strata's means as well."
        )
    elif len(question.parts) > 1:
        lines.append("Results without strata are left out: not every stratum has a mean.")
    if "composites" in compared.rows:
        tried = listed([str(k) for k in INCREMENTS])
        lines.append(
            f"Composites are tried with {tried} increments; they give a mean and its spread, and "
            "show no single place."
        )
    if any(design.crew_days for design in compared.designs):
        lines.append("A crew visits as many places a day whether it samples or only reads there.")
    return tuple(lines)


def _picture(compared: _Compared) -> Picture:
    """Lay each kind's row as a line, what is not beaten as dots, what is beaten as rings."""
    wanted, best = compared.wanted, compared.best
    word = "standard error" if wanted.measure == "standard_error" else "half-width"
    beaten = [design for design in compared.shown(compared.designs) if design not in best]

    def series(label: str, designs: Sequence[PricedDesign], style: Style) -> Series:
        ordered = sorted(designs, key=lambda d: d.cost)
        costs, reached = [d.cost for d in ordered], [wanted.of(d) for d in ordered]
        return Series(label, tuple(costs), tuple(reached), style)

    rows = {label: compared.shown(efficient(row)) for label, row in compared.rows.items()}
    lines = [series(label, row, "line") for label, row in rows.items() if row]
    ends = (best[0], best[-1])
    return Picture(
        kind="frontier",
        caption=(
            f"The {word} of the mean against money. Dots are designs that no other beats, rings "
            "those that another beats in both; a line joins designs of one kind. Far dearer "
            "designs lie beyond its edge."
        ),
        alternative=(
            f"Designs from {compared.money(ends[0].cost)} with a "
            f"{compared.precision(wanted.of(ends[0]))} to {compared.money(ends[1].cost)} with a "
            f"{compared.precision(wanted.of(ends[1]))}. This plan: "
            f"{compared.money(compared.own.cost)}, {compared.precision(wanted.of(compared.own))}."
        ),
        x_label=f"cost ({compared.currency})" if compared.currency else "cost",
        y_label=f"{word}\n({compared.unit})" if compared.unit else word,
        series=(
            *lines,
            series("", beaten, "hollow"),
            series("", best, "points"),
            series("this plan", [compared.own], "points"),
        ),
        levels=((f"{with_unit(figure(wanted.value), compared.unit)}, this plan", wanted.value),),
    )
