"""Sheets of many strata, and of several analytes that decide."""

from dataclasses import replace

from fieldplan.packet.sheets.answer import SHOWN, stratum_table
from fieldplan.packet.sheets.methods import drawn_sentence
from fieldplan.packet.sheets.plan_words import assumed_lines
from fieldplan.packet.sheets.question_section import also_asked
from fieldplan.plan.model import Plan
from fieldplan.sizing.model import StratumSize
from tests.factories import make_plan
from tests.several_analytes import campaign_with_zinc, plan_with_zinc, zinc_objective


def many(count: int = 40) -> Plan:
    """A plan of as many strata, the largest in the middle."""
    plan = make_plan()
    strata = tuple(
        StratumSize(f"zone {k:02d}", 1 / count, 10.0, 3, 20 - abs(k - 20) // 2, 1)
        for k in range(count)
    )
    total = sum(entry.planned for entry in strata)
    size = replace(plan.size, strata=strata, needed=3 * count, planned=total)
    guesses = tuple(replace(plan.spread.strata[0], stratum=entry.stratum) for entry in strata)
    return replace(plan, size=size, spread=replace(plan.spread, strata=guesses))


def test_the_first_table_names_the_largest_and_sums_up_the_rest() -> None:
    """Every column of numbers still adds up to the line of all."""
    plan = many()
    rows = stratum_table(plan).rows
    assert len(rows) == SHOWN + 1
    assert rows[SHOWN - 1][0] == f"{40 - SHOWN + 1} others"
    assert sum(int(row[4]) for row in rows[:-1]) == int(rows[-1][4]) == plan.size.planned
    assert rows[0][0] == "zone 19"
    assert len(stratum_table(plan, whole=True).rows) == 41


def test_a_few_strata_are_all_named() -> None:
    """Nothing changes below the limit."""
    table = stratum_table(many(SHOWN))
    assert len(table.rows) == SHOWN + 1
    assert not any("others" in row[0] for row in table.rows)


def test_guesses_in_many_strata_are_one_stamped_line() -> None:
    """Forty lines of the same would hide what else is assumed."""
    (line,) = [line for line in assumed_lines(many()) if "deviation" in line]
    assert line == (
        "ASSUMED: the standard deviations of 18 mg/kg in 40 strata are guesses, not measurements."
    )


def test_the_sentence_for_the_report_sums_up_many_strata() -> None:
    """It names three, and how many lie in the others."""
    sentence = drawn_sentence(many())
    assert "in 37 others" in sentence
    assert sentence.count("zone") == 3


def test_an_analyte_that_decides_as_well_is_said_to() -> None:
    """The sheet asks the same questions of both."""
    plan = plan_with_zinc()
    (alone,) = also_asked(plan)
    assert "decides" not in alone
    both = campaign_with_zinc(zinc_objective(standard_error=15.0, decides_n=True))
    (told,) = also_asked(replace(plan, campaign=both))
    assert told == f"{alone}; it decides n as well"
