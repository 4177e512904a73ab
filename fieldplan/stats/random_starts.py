"""The variance of a mean from several independent systematic samples."""

import numpy as np
from numpy.typing import ArrayLike


def variance_between_starts(means: ArrayLike, counts: ArrayLike) -> float:
    r"""Estimate the variance of the mean of all results from the means of independent starts.

    Parameters
    ----------
    means : array of float, shape (k,)
        Mean of the results of each start; k at least 2.
    counts : array of int, shape (k,)
        Results behind each, m.

    Returns
    -------
    float
        Variance of the mean of all n = Σ m results, in the square of their unit.

    Raises
    ------
    ValueError
        Fewer than two starts, or one without a result.

    Notes
    -----
    :math:`\sum_j m_j (\bar y_j - \bar y)^2 / (n (k - 1))`. With equal m it is the spread of k
    independent and equally good estimates over k: the replicated systematic samples of Cochran
    (1977), Sampling Techniques, 3rd ed., sec. 8.11 (from memory), unbiased whatever the results
    look like along the line. Where m differ by one it is unbiased if the variance of a start's
    mean goes as 1/m.

    Examples
    --------
    >>> variance_between_starts([4.0, 6.0, 8.0], [5, 5, 5])
    1.3333333333333333
    """
    values = np.asarray(means, dtype=np.float64)
    sizes = np.asarray(counts, dtype=np.float64)
    if values.size < 2 or sizes.shape != values.shape:
        message = f"{values.size} starts were given; a variance between starts needs 2."
        raise ValueError(message)
    if (sizes < 1).any():
        message = f"a start has {sizes.min():g} results; each needs at least 1."
        raise ValueError(message)
    total = float(sizes.sum())
    centre = float(sizes @ values) / total
    return float(sizes @ (values - centre) ** 2) / (total * (values.size - 1))


def freedom_of_parts(variances: ArrayLike, known: ArrayLike) -> float:
    """Give the degrees of freedom of a sum of independent variances by Satterthwaite's formula.

    Parameters
    ----------
    variances : array of float, shape (h,)
        Parts of the variance; at least one above 0, else the smallest ``known`` is returned.
    known : array of float, shape (h,)
        Degrees of freedom of each.

    Notes
    -----
    (Σ v)² / Σ (v²/f): Satterthwaite (1946), Biometrics Bulletin 2, 110.

    Examples
    --------
    >>> freedom_of_parts([2.0, 2.0], [3, 3]), freedom_of_parts([0.0], [2])
    (6.0, 2.0)
    """
    parts = np.asarray(variances, dtype=np.float64)
    freedom = np.asarray(known, dtype=np.float64)
    if not (parts > 0).any():
        return float(freedom.min())
    return float(parts.sum() ** 2 / (parts**2 / freedom).sum())
