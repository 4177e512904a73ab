"""The working of a mean from compact cells: cell means, variance, degrees of freedom."""

import numpy as np

from fieldplan.base.working import Quantity, Step
from fieldplan.design.model import CellVariance, StratumEstimate, StratumValues
from fieldplan.estimate.means import Means

MOST_SHOWN = 12
"""Terms of a sum that are shown one by one; of more their sum is shown."""
_STRATA = "Cochran 1977, Sampling Techniques, 3rd ed., ch. 5"
_COLLAPSED = "Cochran 1977, Sampling Techniques, 3rd ed., sec. 5A.12"
_MATERN = "Matérn 1960, Spatial Variation, ch. 5"
_FREEDOM = "Satterthwaite 1946, Biometrics Bulletin 2:110; the terms f + 2 and − 2 derived here"


def cell_mean_step(
    values: StratumValues, found: StratumEstimate, entry: CellVariance, *, unit: str, label: str
) -> Step:
    """Show the mean of a stratum as the weighed mean of its cell means.

    Parameters
    ----------
    values : StratumValues
        With cells.
    found : StratumEstimate
    entry : CellVariance
    unit : str
    label : str
        Name of the stratum, empty where there is one.

    Returns
    -------
    Step
    """
    assert values.cells is not None  # an estimate by cells has them
    mark, of = (f" {label}", f" in {label}") if label else ("", "")
    shares = {cell.number: cell.share for cell in values.cut}
    for empty, full in entry.joined:
        shares[full] += shares.pop(empty)
    inputs: list[Quantity] = []
    if len(shares) <= MOST_SHOWN:
        for number, share in shares.items():
            mean = float(values.values[values.cells == number].mean())
            inputs.append(Quantity(f"a {number}", f"share of cell {number}{of}", share))
            inputs.append(Quantity(f"m {number}", f"mean of cell {number}{of}", mean, unit))
    else:
        low, high = min(shares.values()), max(shares.values())
        inputs += [
            Quantity("cells", f"cells with results{of}", len(shares)),
            Quantity("a min", f"share of the smallest cell{of}", low),
            Quantity("a max", f"share of the largest cell{of}", high),
            Quantity("Σ x", f"sum of the results{of}", float(values.values.sum()), unit),
        ]
    inputs.append(Quantity("n", f"results{of}, one a location", found.n))
    return Step(
        symbol=f"mean{mark}",
        meaning=f"Mean of the cell means{of}, weighed by the cells' shares of the area",
        formula="mean = Σ a·(mean of the cell)",
        inputs=tuple(inputs),
        unrounded=found.mean,
        rounded=found.mean,
        unit=unit,
        source=_STRATA,
    )


def cell_error_steps(means: Means, unit: str) -> list[Step]:
    """Show the variance of every stratum's mean, and the standard error.

    Parameters
    ----------
    means : Means
        Whose estimate holds ``cell_variances``.
    unit : str

    Returns
    -------
    list of Step
    """
    several = len(means.values) > 1
    steps, inputs = [], []
    for entry, found in zip(means.half.cell_variances, means.half.strata, strict=True):
        mark, of = (f" {entry.stratum}", f" in {entry.stratum}") if several else ("", "")
        shown = _by_curves if entry.rule == "covariance" else _by_pairs
        steps.append(shown(entry, found, unit=unit, mark=mark, of=of))
        inputs += [Quantity(f"W{mark}", "share of the population", found.weight)] if several else []
        inputs.append(
            Quantity(f"V{mark}", f"variance of the mean{of}", found.variance_of_mean, f"({unit})²")
        )
    error = means.half.standard_error
    formula = "SE = √(Σ W²·V)" if several else "SE = √V"
    steps.append(
        Step(
            "SE", "Standard error of the mean", formula, tuple(inputs), error, error, unit, _STRATA
        )
    )
    return steps


def _by_pairs(
    entry: CellVariance, found: StratumEstimate, *, unit: str, mark: str, of: str
) -> Step:
    """Show the sum over pairs; many pairs by the largest and the smallest."""
    parts = [variance for _, variance, _ in entry.parts]
    if len(parts) <= MOST_SHOWN:
        inputs = [
            Quantity(f"v {cells}", f"from cell {cells}{of}", variance, f"({unit})²")
            for cells, variance, _ in entry.parts
        ]
    else:
        inputs = [
            Quantity("pairs", f"pairs of results{of}", len(parts)),
            Quantity("v min", f"the smallest of them{of}", min(parts), f"({unit})²"),
            Quantity("v max", f"the largest of them{of}", max(parts), f"({unit})²"),
        ]
    joined = any(" + " in cells for cells, _, _ in entry.parts)
    return Step(
        symbol=f"V{mark}",
        meaning=f"Variance of the mean{of}, from pairs: s² among the results of a cell or of "
        "neighbouring cells, times Σ a²/n over these cells",
        formula="V = Σ v, v = s²·Σ a²/n",
        inputs=tuple(inputs),
        unrounded=found.variance_of_mean,
        rounded=found.variance_of_mean,
        unit=f"({unit})²",
        source=_COLLAPSED if joined else _STRATA,
    )


def _by_curves(
    entry: CellVariance, found: StratumEstimate, *, unit: str, mark: str, of: str
) -> Step:
    """Show what the curves gave on average."""
    return Step(
        symbol=f"V{mark}",
        meaning=f"Variance of the mean{of}: that inside the cells for each of 126 curves of "
        "likeness with distance, averaged by weight on the log scale. The inputs but the first are "
        "averages over the curves",
        formula="ln V = Σ w·ln(q·σ²·(ν + (1 − ν)(1 − c)))",
        inputs=(
            Quantity("q", f"Σ a²/n over the cells{of}", entry.sum_of_squares),
            Quantity("σ", "standard deviation of single places", entry.sigma, unit),
            Quantity("ν", "share of the variance without structure", entry.nugget),
            Quantity("c", "correlation of two places of a cell", entry.inside),
            Quantity("r", "distance at which 5 % is left", entry.practical_range_m, "m"),
        ),
        unrounded=found.variance_of_mean,
        rounded=found.variance_of_mean,
        unit=f"({unit})²",
        source=_MATERN,
    )


def cell_freedom_step(means: Means, unit: str) -> Step:
    """Show the degrees of freedom: of the one part, or from all of them.

    Parameters
    ----------
    means : Means
    unit : str

    Returns
    -------
    Step
    """
    known = means.half.degrees_of_freedom
    parts = np.array(
        [
            (found.weight**2 * variance, free)
            for entry, found in zip(means.half.cell_variances, means.half.strata, strict=True)
            for _, variance, free in entry.parts
        ]
    )
    if len(parts) == 1:
        inputs: tuple[Quantity, ...] = (Quantity("f", "of the one part", float(parts[0, 1])),)
        return Step("df", "Degrees of freedom", "df = f", inputs, known, known, "", _FREEDOM)
    squares = float((parts[:, 0] ** 2 / (parts[:, 1] + 2)).sum())
    return Step(
        symbol="df",
        meaning="Degrees of freedom by Satterthwaite, for parts v that each know very little (f "
        "degrees of freedom); at least 1, at most Σ f",
        formula="df = (Σ v)² / Σ (v²/(f + 2)) − 2",
        inputs=(
            Quantity("Σ v", "parts of the variance, W² in", float(parts[:, 0].sum()), f"({unit})²"),
            Quantity("Σ (v²/(f + 2))", "their squares over f + 2", squares, f"({unit})⁴"),
            Quantity("Σ f", "degrees of freedom of all parts", float(parts[:, 1].sum())),
        ),
        unrounded=known,
        rounded=known,
        source=_FREEDOM,
    )
