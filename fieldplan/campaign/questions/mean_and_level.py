"""``[objective.mean_and_level]``: do the results show on which side of the level the mean lies."""

from collections.abc import Iterator
from typing import Annotated, Any, Literal, TypeGuard

from pydantic import Field

from fieldplan.campaign.table import PositiveNumber, Table, tables

MEANING = {
    "": "on which side of the action level the mean lies",
    "assume": "where the mean is taken to lie until results show otherwise",
    "gray_edge": (
        "the other edge of the gray region: the mean that shall be told from the level with "
        "chance 1 - beta"
    ),
    "alpha": "chance to leave the assumption though it is true, at most: the mean at the level",
    "beta": "chance to keep the assumption though the mean lies at gray_edge",
    "test": "what decides: t about the mean, sign about the median, signed-rank in between",
    "assurance": "how sure it shall be that n is enough, though sigma is an estimate",
    "decisions": "analytes or wells that are decided on at once in this way",
    "together": "whether each decision stands alone, or one claim needs all of them",
}

Chance = Annotated[float, Field(ge=1e-6, lt=1, allow_inf_nan=False)]


class MeanAndLevel(Table):
    """The assumption to start from, the gray region and the chances of the two wrong decisions."""

    assume: Literal["above-level", "below-level"]
    gray_edge: PositiveNumber
    alpha: Chance
    beta: Chance
    test: Literal["t", "sign", "signed-rank"] = "t"
    assurance: Annotated[float, Field(ge=0.5, lt=1)] | Literal["plain"] = "plain"
    decisions: Annotated[int, Field(ge=1, le=1000)] = 1
    together: Literal["each-alone", "all-or-nothing"] | None = None


def problems(table: dict[str, Any], data: dict[str, Any]) -> Iterator[tuple[str, str]]:
    """Give key and sentence for each rule that the table breaks.

    Parameters
    ----------
    table : dict
        ``[objective.mean_and_level]`` as typed.
    data : dict
        The whole file.
    """
    yield from _chances(table)
    yield from _gray_region(table, data)
    yield from _together(table)
    if table.get("test") in ("sign", "signed-rank") and _has_strata(data):
        yield (
            "test",
            "gives every result the same say, which strata of different weight do not allow "
            f'(got "{table["test"]}"). Write test = "t".',
        )


def _chances(table: dict[str, Any]) -> Iterator[tuple[str, str]]:
    alpha, beta = table.get("alpha"), table.get("beta")
    yield from alpha_problems(alpha)
    if _is_number(alpha) and _is_number(beta) and alpha + beta >= 1:
        yield (
            "beta",
            f"alpha and beta sum to {alpha + beta:g}; together they must stay below 1, or a coin "
            f"does as well (got {alpha:g} and {beta:g}). Lower one of them.",
        )


def _gray_region(table: dict[str, Any], data: dict[str, Any]) -> Iterator[tuple[str, str]]:
    analyte = _analyte_of(table, data)
    if analyte is None:
        return
    level, edge = analyte.get("action_level"), table.get("gray_edge")
    if level is None:
        yield (
            "gray_edge",
            "there is no level to compare the mean with: the analyte has no action_level. Give "
            "action_level and action_level_source in [[analyte]].",
        )
        return
    if not (_is_number(level) and _is_number(edge)):
        return
    if edge == level:
        yield (
            "gray_edge",
            f"the gray region has no width: its edge is the level of {level:g} itself. Move it to "
            "the nearest mean that must still be told from the level.",
        )
        return
    side = {"above-level": "below", "below-level": "above"}.get(str(table.get("assume")))
    if side is not None and (edge < level) != (side == "below"):
        yield (
            "gray_edge",
            f'with assume = "{table["assume"]}" the results must show a mean {side} the level of '
            f"{level:g}, so the edge lies {side} it (got {edge:g}). Move it, or change assume.",
        )


def _together(table: dict[str, Any]) -> Iterator[tuple[str, str]]:
    decisions = table.get("decisions", 1)
    several = _is_number(decisions) and decisions > 1
    if several and "together" not in table:
        yield (
            "together",
            f"missing; {decisions} decisions either stand alone or carry one claim. Takes "
            '"each-alone" or "all-or-nothing".',
        )
    if decisions == 1 and "together" in table:
        yield "together", "one decision stands alone. Take this key out, or give decisions."


def _analyte_of(table: dict[str, Any], data: dict[str, Any]) -> dict[str, Any] | None:
    """Find the analyte of the objective that the table stands below; None where unclear."""
    analytes = tables(data, "analyte")
    for objective in tables(data, "objective"):
        if objective.get("mean_and_level") is table:
            name = objective.get("analyte")
            if name is None and len(analytes) == 1:
                return analytes[0]
            return next((a for a in analytes if a.get("id") == name), None)
    return None


def _has_strata(data: dict[str, Any]) -> bool:
    return any(design.get("layout") == "stratified" for design in tables(data, "design"))


def _is_number(value: object) -> TypeGuard[float]:
    return isinstance(value, int | float) and not isinstance(value, bool)


def alpha_problems(alpha: object) -> Iterator[tuple[str, str]]:
    """Refuse an alpha beyond which a limit lies on the wrong side of its mean."""
    if isinstance(alpha, float) and 0.5 < alpha < 1:
        yield (
            "alpha",
            f"may be 0.5 at most; beyond it a limit lies on the wrong side of the mean (got "
            f"{alpha:g}). Write e.g. 0.05.",
        )
