"""The correlation of a series, against a general-purpose statistics library and open data.

Source of the data: annual flow of the Nile 1871–1970 (Cobb 1978), shipped with statsmodels.
"""

import math

import numpy as np
import pytest

from fieldplan.stats.series_correlation import autocorrelation, correlation_of_visits
from fieldplan.stats.time_series import effective_number, effective_number_of_lags, inflation

pytestmark = pytest.mark.oracle


@pytest.fixture(scope="module")
def nile() -> list[float]:
    """Return the hundred annual flows, in 1e8 m³."""
    from statsmodels.datasets import nile as shipped

    return [float(value) for value in shipped.load_pandas().data["volume"]]


def test_correlations_at_every_distance_equal_those_of_the_library(nile: list[float]) -> None:
    """Two implementations that share no code agree to ten digits, to twenty years apart."""
    from statsmodels.tsa.stattools import acf

    theirs = acf(nile, nlags=20, fft=False)
    for lag in range(1, 21):
        assert autocorrelation(nile, lag) == pytest.approx(float(theirs[lag]), rel=1e-10)


def test_the_best_correlation_is_close_to_that_of_a_fitted_series(nile: list[float]) -> None:
    """Full maximum likelihood lies inside our interval, and below our corrected value."""
    from statsmodels.tsa.arima.model import ARIMA

    fitted = ARIMA(np.array(nile), order=(1, 0, 0)).fit()
    theirs = float(fitted.params[1])
    ours = correlation_of_visits([365.25 * year for year in range(100)], nile)
    assert ours.low <= theirs <= ours.high
    assert theirs < ours.rho < theirs + 5 / 100


def test_the_long_run_variance_of_a_fitted_series_gives_the_same_worth(nile: list[float]) -> None:
    """The library's theoretical correlations of such a series, summed lag by lag."""
    from statsmodels.tsa.arima_process import ArmaProcess

    rho = autocorrelation(nile)
    lags = ArmaProcess([1, -rho], [1]).acf(100)[1:]
    assert effective_number_of_lags(100, [float(lag) for lag in lags]) == pytest.approx(
        effective_number(100, rho), rel=1e-10
    )
    assert math.isclose(100 / effective_number(100, rho), inflation(rho), rel_tol=0.05)
