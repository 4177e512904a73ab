"""Parts of sigma against a mixed model fitted by another library.

On balanced data with no negative estimate, restricted maximum likelihood and the analysis of
variance are the same estimator, so the two must agree to the precision of the fit.
"""

import numpy as np
import pytest

from fieldplan.stats.nested import nested_components
from tests.unit.stats.test_nested import LEAVES, WINGS

pytestmark = pytest.mark.oracle


def fitted(results: object) -> list[float]:
    """Fit places, samples and analyses by restricted maximum likelihood."""
    import pandas as pd
    from statsmodels.regression.mixed_linear_model import MixedLM

    rows = [
        (x, i, f"{i}-{j}")
        for i, place in enumerate(results)  # type: ignore[arg-type, var-annotated]
        for j, jar in enumerate(place)
        for x in jar
    ]
    table = pd.DataFrame(rows, columns=["x", "place", "jar"])
    model = MixedLM.from_formula(
        "x ~ 1", groups="place", re_formula="1", vc_formula={"jar": "0 + C(jar)"}, data=table
    )
    found = model.fit(reml=True, method=["lbfgs", "powell"])
    return [float(found.cov_re.iloc[0, 0]), float(found.vcomp[0]), float(found.scale)]


@pytest.mark.parametrize("data", [WINGS, LEAVES], ids=["wings", "leaves"])
def test_published_examples_agree_with_a_mixed_model(data: object) -> None:
    """Sokal & Rohlf's and Snedecor & Cochran's data, both balanced."""
    ours = [part.variance for part in nested_components(data).components]  # type: ignore[arg-type]
    assert ours == pytest.approx(fitted(data), rel=2e-3)


def test_simulated_duplicates_agree_with_a_mixed_model() -> None:
    """A study of the size that campaigns have: 12 places, 2 jars, 2 analyses."""
    rng = np.random.default_rng(29)
    y = (
        rng.normal(50, 12, (12, 1, 1)) + rng.normal(0, 6, (12, 2, 1)) + rng.normal(0, 3, (12, 2, 2))
    ).tolist()
    ours = [part.variance for part in nested_components(y).components]
    assert min(ours) > 0
    assert ours == pytest.approx(fitted(y), rel=2e-3)
