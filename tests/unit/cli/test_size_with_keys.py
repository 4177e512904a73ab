"""Keys typed by ``--with``: once each, read by something, and refused in the words of options."""

import json

import pytest
from click.testing import Result

from fieldplan.campaign.questions import MODULES, table_of
from fieldplan.cli import entry
from fieldplan.cli.question_keys import WAYS, needed_keys, table_model, ways
from fieldplan.cli.with_keys import OPTION_OF
from tests.command_runner import command_runner

MEAN = ("--sigma", "20", "--standard-error", "4")
CLEAR = ("--question", "all-clear", "--with", "share=0.05")
LEVEL = (
    "--question", "mean-and-level", "--sigma", "48", "--with", "gray_edge=110",
    "--with", "alpha=0.05", "--with", "beta=0.2", "--with", "assume=above-level",
)  # fmt: skip


def run(*words: str) -> Result:
    """Run the command as typed."""
    return command_runner().invoke(entry, ["size", *words])


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (
            (*MEAN, "--with", "sigma.value=40"),
            "--with 'sigma.value=40' says again what --sigma 20 says; keep one of them.",
        ),
        (
            (*CLEAR, "--with", "share=0.10"),
            "--with 'share=0.10': share was typed before (share=0.05); keep one.",
        ),
        (
            (*CLEAR, "--with", "all_clear.share=0.10"),
            "--with 'all_clear.share=0.10': all_clear.share was typed before (share=0.05); keep "
            "one.",
        ),
        (
            (*MEAN, "--one-sided", "--with", "rules.interval=two-sided"),
            "--with 'rules.interval=two-sided' says again what --one-sided says; keep one of them.",
        ),
        (
            ("--stratum", "1,3", "--standard-error", "1", "--with", "sigma.value=4"),
            "--with 'sigma.value=4' says again what --stratum says; keep one of them.",
        ),
        (
            (*MEAN, "--with", "objective.half_width=5"),
            "--standard-error and --half-width are both given; keep one target.",
        ),
        (
            (*CLEAR, "--with", "frame.kind=line"),
            "--with 'frame.kind=line': bare numbers have no place to look at. Type --population "
            "for a list or --area for an area, or name a campaign file.",
        ),
        (
            (*CLEAR, "--with", "draw.seed=7"),
            "--with 'draw.seed=7': bare numbers do not look at draw; write it into a campaign "
            "file.",
        ),
        (
            (*MEAN, "--with", "sigma.pilot=pilot.csv"),
            "--with 'sigma.pilot=pilot.csv': bare numbers do not look at sigma.pilot; write it "
            "into a campaign file.",
        ),
        (
            (*MEAN, "--with", "cost..per_location=7"),
            "--with 'cost..per_location=7': write a key and its value, such as share=0.05.",
        ),
        (
            (*MEAN, "--with", "loss.share=0.2", "--with", "loss.expected=0.2"),
            "--with loss.expected: this key has another table: objective.share. Type that before "
            "it.",
        ),
        (
            (*MEAN, "--with", "objective.all_clear=5"),
            "--with objective.all_clear: a table of keys (got 5). Type a point and one of its keys "
            "after it.\n--with objective.all_clear.share: needs exactly one of share and units "
            "(got neither). Type one.",
        ),
        (
            (*CLEAR, "--with", "nope.seed=7"),
            "--with 'nope.seed=7': there is no table nope; there are objective, sigma, design, "
            "cost, loss, qc, field_reading, field, analyte, rules.",
        ),
        (
            (*CLEAR, "--with", "sigma.value=nan"),
            "--sigma 'nan' is no number; write one such as 27.57.",
        ),
        (
            (*CLEAR, "--with", "sigma.correlation_between_visits=0.3"),
            "--with 'sigma.correlation_between_visits=0.3' speaks of a sigma that was not typed; "
            "add --sigma.",
        ),
        (
            (*CLEAR, "--with", "confidence=2026-01-01"),
            "--with 'confidence=2026-01-01' is a date or a time, and none is read here; type a "
            "number.",
        ),
        (
            (*MEAN, "--with", "cost.currency=12:30:00"),
            "--with 'cost.currency=12:30:00' is a date or a time, and none is read here; type a "
            "number.",
        ),
        (
            (*MEAN, "--with", "design.most={a=[2026-01-01]}"),
            "--with 'design.most={a=[2026-01-01]}' is a date or a time, and none is read here; "
            "type a number.",
        ),
        (
            ("--question", "all-clear", "--with", "share=FILL IN"),
            "--with 'share=FILL IN' is not known yet; type a value, or leave it out.",
        ),
        (
            ("--question", "all-clear", "--with", 'share="fill-in"'),
            "--with 'share=\"fill-in\"' is not known yet; type a value, or leave it out.",
        ),
        (
            ("--question", "all-clear"),
            "all-clear needs --with share=0.05 (or units=…), with your numbers.",
        ),
        (
            ("--question", "mean-and-level", "--sigma", "48"),
            "mean-and-level needs --level 50 --with assume=above-level --with gray_edge=20 "
            "--with alpha=0.05 --with beta=0.05, with your numbers.",
        ),
        (
            ("--question", "all-clear", "--with", "share=5"),
            "--with share: the share of the population above the level that must not stay "
            "unnoticed; takes a number above 0 and below 1 (got 5). For 5 % type 0.05.",
        ),
        (
            LEVEL,
            "--with gray_edge: there is no level to compare the mean with. Add --level.",
        ),
        (
            ("--sigma", "6", "--with", "design.locations=12"),
            "fixed locations are held against a target: add the one that you would like, such as "
            "--standard-error 6; the answer says what the locations reach.",
        ),
        (
            (*MEAN, "--level", "10"),
            "--level 10 does not change how precise a mean is; leave it out, or ask --question "
            "mean-and-level.",
        ),
        (
            (*MEAN, "--with", "cost.currency=EUR", "--with", "cost.per_analysi=90"),
            '--with cost.per_analysi: unknown key in [cost]. Did you mean "per_analysis"?',
        ),
        (
            (*MEAN, "--with", "sigma.analysis=-5"),
            "--with sigma.analysis: standard deviation of single results, in the analyte's unit; "
            "takes a number above 0 (got -5).",
        ),
    ],
)  # fmt: skip
def test_a_key_that_cannot_count_gets_one_line(words: tuple[str, ...], said: str) -> None:
    """A value that is dropped in silence is an answer to another question."""
    result = run(*words)
    assert result.exit_code == 2, result.stdout
    assert result.stderr == said + "\n"
    assert result.stdout == ""


def test_a_misplaced_key_is_answered_by_the_one_that_was_meant() -> None:
    """The share question calls its share ``expected``, since that is all that is known of it."""
    result = run("--question", "share", "--with", "share=0.2", "--with", "margin=0.1")
    assert result.exit_code == 2
    assert "did you mean expected? It takes expected, margin, method," in result.stderr


@pytest.mark.parametrize(
    ("keys", "options"),
    [
        (("objective.standard_error=4",), ("--standard-error", "4")),
        (("objective.half_width=8", "rules.confidence=0.9"),
         ("--half-width", "8", "--confidence", "0.9")),
        (("objective.relative_half_width=0.2", "sigma.expected_mean=80"),
         ("--relative-half-width", "0.2", "--mean", "80")),
        (("objective.standard_error=4", "sigma.from_results=9", "objective.assurance=0.8"),
         ("--standard-error", "4", "--pilot-n", "9", "--assurance", "0.8")),
        (("objective.standard_error=4", "analyte.unit=mg/kg"),
         ("--standard-error", "4", "--unit", "mg/kg")),
    ],
)  # fmt: skip
def test_a_key_counts_as_the_option_that_stands_for_it(
    keys: tuple[str, ...], options: tuple[str, ...]
) -> None:
    """``table.key of a campaign file``, says the help: a target is one of them."""
    by_keys = run("--sigma", "20", *(word for key in keys for word in ("--with", key)), "--json")
    by_options = run("--sigma", "20", *options, "--json")
    assert by_keys.exit_code == 0, by_keys.stderr
    assert json.loads(by_keys.stdout)["n"] == json.loads(by_options.stdout)["n"]


def test_a_budget_by_key_buys_what_the_option_buys() -> None:
    """9000/90 = 100."""
    prices = ("--with", "cost.currency=EUR", "--with", "cost.per_analysis=90")
    for budget in (("--budget", "9000"), ("--with", "objective.budget=9000")):
        assert json.loads(run("--sigma", "20", *budget, *prices, "--json").stdout)["n"] == 100


@pytest.mark.parametrize("question", list(MODULES))
def test_the_example_of_every_question_runs_as_it_is_printed(question: str) -> None:
    """An example that is refused sends people in circles."""
    printed = needed_keys(question).removeprefix(f"{question} needs ")
    words = printed.partition(", with your")[0].partition(" (or ")[0].split()
    result = run("--question", question, *words, "--quiet")
    assert result.exit_code == 0, result.stderr
    assert run("--question", question).stderr == needed_keys(question) + "\n"


@pytest.mark.parametrize("question", list(WAYS))
def test_every_way_to_ask_a_question_holds_keys_of_its_table(question: str) -> None:
    """The list of ways stands apart from the models, so it is held against them."""
    for way in ways(question):
        table = {key: 0.1 + 0.1 * place for place, key in enumerate(way)}
        assert set(table) <= set(table_model(question).model_fields)
        listed = {"frame": [{"kind": "list"}], "sigma": [{}]}
        assert not list(MODULES[question].problems(table, listed))


def test_every_key_that_an_option_stands_for_is_a_key_of_the_campaign_file() -> None:
    """A misspelt one would never be met."""
    from fieldplan.campaign.shape import key_homes

    for table, key in OPTION_OF:
        assert table in {home.strip("[]") for home in key_homes()[key]}, (table, key)


def test_remedies_speak_of_options_where_options_were_typed() -> None:
    """Nobody who typed numbers has a [rules] table."""
    printed = " ".join(run(*LEVEL, "--level", "150", "--json").stdout.split())
    assert "the options fix another" in printed
    assert "Add --one-sided and --confidence 0.95, or expect other chances" in printed
    assert "[rules]" not in printed
    fixed = run(*MEAN, "--with", "design.locations=12").stdout
    assert fixed.startswith("The options fix 12 locations.")
    split = run(*MEAN, "--with", "design.increments=10")
    assert "Add --with sigma.analysis=5, with yours." in str(split.exception)


@pytest.mark.parametrize("question", list(MODULES))
def test_no_answer_to_bare_numbers_names_a_table_in_brackets(question: str) -> None:
    """Where a remedy names a table, the translation lacks a line."""
    printed = needed_keys(question).removeprefix(f"{question} needs ")
    words = printed.partition(", with your")[0].partition(" (or ")[0].split()
    told = run("--question", question, *words, "--json").stdout
    for table in ("rules", "objective", "sigma", "analyte", "cost", "design"):
        assert f"[{table}" not in told, table
    assert table_of(question).strip()
