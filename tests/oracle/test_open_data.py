"""Open data and interval code of a general-purpose statistics library, as a second source.

Source of the data: annual flow of the Nile 1871–1970 (Cobb 1978), shipped with statsmodels.
"""

from pathlib import Path

import numpy as np
import pytest

from fieldplan.lab import read_lab
from fieldplan.stats.intervals import t_interval
from fieldplan.stats.precision import n_for_standard_error, standard_error
from fieldplan.stats.summary import sample_mean, sample_sd
from tests.factories import make_campaign
from tests.unit.stats.published import row

pytestmark = pytest.mark.oracle


@pytest.fixture(scope="module")
def nile() -> list[float]:
    """Return the hundred annual flows, in 1e8 m³."""
    from statsmodels.datasets import nile as shipped

    return [float(value) for value in shipped.load_pandas().data["volume"]]


def test_open_data_read_through_a_laboratory_file_keeps_mean_and_spread(
    nile: list[float], tmp_path: Path
) -> None:
    """Every digit must survive the reader (values.csv A13-029 and A13-030)."""
    lines = ["sample_id,analyte,as_reported,unit"]
    lines += [f"N{number},lead,{value:g},mg/kg" for number, value in enumerate(nile)]
    (tmp_path / "nile.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")
    table = read_lab(tmp_path / "nile.csv", make_campaign())
    results = [entry.result for entry in table.rows if entry.result is not None]
    assert len(results) == row("A13-030").exact
    assert sample_sd(results) == pytest.approx(row("A13-029").exact, rel=1e-12)
    assert sample_mean(results) == pytest.approx(float(np.mean(nile)), rel=1e-14)


@pytest.mark.parametrize("n", [3, 8, 30, 100])
@pytest.mark.parametrize(
    ("kind", "alternative"),
    [("two-sided", "two-sided"), ("upper-limit", "smaller"), ("lower-limit", "larger")],
)
def test_t_intervals_equal_those_of_another_library(
    nile: list[float], n: int, kind: str, alternative: str
) -> None:
    """Two implementations that share no code must agree to ten digits."""
    from statsmodels.stats.weightstats import DescrStatsW

    values = nile[:n]
    theirs = DescrStatsW(values).tconfint_mean(alpha=0.05, alternative=alternative)
    ours = t_interval(
        sample_mean(values),
        standard_error(sample_sd(values), n),
        n - 1,
        confidence=0.95,
        kind=kind,  # type: ignore[arg-type]
    )
    for mine, other in zip(ours, theirs, strict=True):
        if mine is None:
            assert np.isinf(other)
        else:
            assert mine == pytest.approx(float(other), rel=1e-10)


def test_the_number_for_a_standard_error_is_the_first_that_reaches_it(nile: list[float]) -> None:
    """By the library's own standard error of the mean on n copies of the spread."""
    from statsmodels.stats.weightstats import DescrStatsW

    target = 20.0
    whole = DescrStatsW(nile, ddof=1)
    n = n_for_standard_error(sample_sd(nile), target)
    assert float(whole.std) / n**0.5 <= target < float(whole.std) / (n - 1) ** 0.5
