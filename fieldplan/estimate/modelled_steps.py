"""The arithmetic of a mean by a method for non-detects, step by step."""

from fieldplan.base.working import Quantity, Step
from fieldplan.estimate.modelled import Modelled, StratumSample
from fieldplan.stats.censored import CensoredMean

_PRODUCT = "Kaplan & Meier 1958, Journal of the American Statistical Association 53:457 (memory)"
_LINE = "Helsel & Cohn 1988, Water Resources Research 24:1997 (memory)"
_HALL = "Hall 1992, Journal of the Royal Statistical Society B 54:221 (memory)"
_LIKELIHOOD = "Cohen 1959, Technometrics 1:217 (memory)"
_PROFILE = "Venzon & Moolgavkar 1988, Applied Statistics 37:87 (memory); drop derived here"
_JACKKNIFE = "Quenouille 1956, Biometrika 43:353 (memory)"
_COMBINE = "Zou & Donner 2008, Statistics in Medicine 27:1693 (memory)"
_STRATA = "Cochran 1977, Sampling Techniques, 3rd ed., ch. 5"

SPREADS = {"lognormal": "σ of the logarithms", "gamma": "coefficient of variation", "normal": "σ"}


def modelled_steps(found: Modelled, unit: str) -> tuple[Step, ...]:
    """Show how the mean and the ends of its interval come from detects and limits.

    Parameters
    ----------
    found : Modelled
    unit : str

    Returns
    -------
    tuple of Step
        Stratum by stratum, then their combination where there are several.
    """
    steps: list[Step] = []
    for sample, part in zip(found.samples, found.parts, strict=True):
        mark = f" {sample.stratum}" if len(found.parts) > 1 else ""
        if found.method == "kaplan-meier":
            steps += _product_limit(sample, part, unit=unit, mark=mark)
        elif found.method == "order-statistics":
            steps += _order_statistics(sample, part, unit=unit, mark=mark)
        else:
            steps += _likelihood(sample, part, unit=unit, mark=mark)
    if len(found.parts) > 1:
        steps += _combined(found, unit)
    return tuple(steps)


def _counts(sample: StratumSample, part: CensoredMean, unit: str, mark: str) -> list[Quantity]:
    limits = sample.limits
    given = [
        Quantity(f"n{mark}", "results", part.n),
        Quantity("non-detects", "of them", part.non_detects),
    ]
    if limits:
        given.append(Quantity("lowest limit", "of a non-detect", min(limits), unit))
        given.append(Quantity("highest limit", "of a non-detect", max(limits), unit))
    return given


def _step(
    symbol: str, meaning: str, formula: str, inputs: list[Quantity], value: float, unit: str,
    source: str,
) -> Step:  # fmt: skip
    return Step(symbol, meaning, formula, tuple(inputs), value, value, unit, source)


def _ends(
    part: CensoredMean, rows: list[tuple[str, str, list[Quantity]]], **words: str
) -> list[Step]:
    """Set the ends that the interval has; ``rows`` are those of low and high."""
    steps = []
    values = (part.low, part.high)
    for (name, formula, inputs), end in zip(rows, values, strict=True):
        if end is not None:
            step = _step(
                f"{name}{words['mark']}", f"{name.capitalize()} end", formula, inputs, end,
                words["unit"], words["source"],
            )  # fmt: skip
            steps.append(step)
    return steps


def _product_limit(
    sample: StratumSample, part: CensoredMean, *, unit: str, mark: str
) -> list[Step]:
    known = part.numbers
    mean, error = Quantity("mean", "of the product limit", part.mean, unit), part.standard_error
    at_zero = [
        Quantity("mean at 0", "with the share left at 0", known["mean_at_0"], unit),
        Quantity("SE at 0", "its standard error", known["error_at_0"], unit),
    ]
    left = [
        Quantity("share left", "below the smallest detect", known["left"]),
        Quantity("at", "where it stands", known["lowest_limit"], unit),
    ]
    both = [mean, Quantity("SE", "standard error", error, unit)]
    freedom = Quantity("df", "n − 1, of Student's quantile t", part.n - 1)
    return [
        _step(
            f"mean{mark}", "Mean of the product limit: each detect with the share it takes",
            "mean = Σ x·(share lost at x) + (share left)·(lowest limit)",
            [*_counts(sample, part, unit, mark), *left], part.mean, unit, _PRODUCT,
        ),
        _step(
            f"SE{mark}", "Standard error of that mean, from the areas A below each detect",
            "SE = √(Σ A²·d/(r·(r − d)) · D/(D − 1))",
            [
                Quantity("without the factor", "√ of the sum", known["error_without_factor"], unit),
                Quantity("D", "detects", part.n - part.non_detects),
            ],
            error, unit, _PRODUCT,
        ),
        *_ends(
            part,
            [
                ("low", "mean at 0 − t·(SE at 0)", [*at_zero, freedom])
                if part.upper_bound
                else ("low", "mean − t·SE", [*both, freedom]),
                ("high", "mean + t·SE", [*both, freedom]),
            ],
            mark=mark, unit=unit, source="Student 1908, Biometrika 6:1",
        ),
    ]  # fmt: skip


def _order_statistics(
    sample: StratumSample, part: CensoredMean, *, unit: str, mark: str
) -> list[Step]:
    known = part.numbers
    n = Quantity(f"n{mark}", "results", part.n)
    sums = [
        Quantity("Σ detects", "sum of the detects", known["sum_detects"], unit),
        Quantity("Σ filled", "sum of what is filled in", known["sum_filled"], unit),
        n,
    ]
    spread = [Quantity("s", "of the completed results", known["sd"], unit), n]
    filled = [_filled(sample, part, unit=unit, mark=mark)] if part.non_detects else []
    return [
        *filled,
        _step(f"mean{mark}", "Mean of the completed results", "mean = (Σ detects + Σ filled)/n",
              sums, part.mean, unit, _LINE),
        _step(f"SE{mark}", "Standard error of that mean", "SE = s/√n", spread,
              part.standard_error, unit, "Cochran 1977, Sampling Techniques, 3rd ed., ch. 2"),
        *_ends(part, _hall_rows(part, unit), mark=mark, unit=unit, source=_HALL),
    ]  # fmt: skip


def _filled(sample: StratumSample, part: CensoredMean, *, unit: str, mark: str) -> Step:
    """Show the line and what it puts for non-detects."""
    known = part.numbers
    line = [
        *_counts(sample, part, unit, mark),
        Quantity("a", "height of the line", known["intercept"]),
        Quantity("b", "slope of the line", known["slope"]),
        Quantity("capped", "set to their limit, since above it", known["capped"]),
    ]
    meaning, formula = "Sum of what the line puts for non-detects", "log x = a + b·z(p)"
    source = f"{_LINE}; p by Hirsch & Stedinger 1987, same journal 23:715 (memory)"
    return _step(f"Σ filled{mark}", meaning, formula, line, known["sum_filled"], unit, source)


def _hall_rows(part: CensoredMean, unit: str) -> list[tuple[str, str, list[Quantity]]]:
    """Give formula and inputs of the low and the high end."""
    known = part.numbers
    shared = [
        Quantity("mean", "of the completed results", part.mean, unit),
        Quantity("SE", "standard error", part.standard_error, unit),
        Quantity("g", "skewness of the completed results", known["skewness"]),
        Quantity("t", "Student's quantile, n − 1", known["t"]),
    ]
    other = [
        Quantity("mean by values", "completed by the line of values", known["mean_values"], unit),
        Quantity("SE by values", "its standard error", known["error_values"], unit),
        Quantity("k by values", "Hall's factor", known["k_low_values"]),
    ]
    below = Quantity("k", "Hall's factor below", known["k_low"])
    above = Quantity("k", "Hall's factor above", known["k_high"])
    low = "the lower of mean + k·SE and mean by values + k by values·SE by values"
    return [
        ("low", low, [*shared, below, *other]),
        ("high", "mean + k·SE", [*shared, above]),
    ]


def _likelihood(sample: StratumSample, part: CensoredMean, *, unit: str, mark: str) -> list[Step]:
    known, shape = part.numbers, part.method.removesuffix("-likelihood")
    fitted = Quantity("fitted", "mean of greatest likelihood", known["fitted"], unit)
    spread = Quantity("spread", f"{SPREADS[shape]} at the fit", known["spread"])
    drop = [
        fitted, spread,
        Quantity("drop", "of the log likelihood, (n/2)·log(1 + t²/(n − 1))", known["drop"]),
        Quantity("t", "Student's quantile, n − 1", known["t"]),
    ]  # fmt: skip
    ends = "mean at which the log likelihood, spread at its best, has fallen by drop"
    return [
        _step(f"fitted{mark}", f"Mean of the {shape} shape of greatest likelihood",
              "greatest Σ log density (detects) + Σ log share below the limit (non-detects)",
              [*_counts(sample, part, unit, mark), spread], known["fitted"], unit, _LIKELIHOOD),
        _step(f"mean{mark}", "The same, less the bias that leaving out each result shows",
              "mean = n·fitted − (n − 1)·(mean of the fits to all but one)",
              [fitted, Quantity(f"n{mark}", "results", part.n)], part.mean, unit, _JACKKNIFE),
        _step(f"SE{mark}", "Standard error, from the curvature of the likelihood at its top",
              "SE = 1/√(−second derivative of the profile)", [fitted, spread],
              part.standard_error, unit, _LIKELIHOOD),
        *_ends(part, [("low", ends, drop), ("high", ends, drop)],
               mark=mark, unit=unit, source=_PROFILE),
    ]  # fmt: skip


def _combined(found: Modelled, unit: str) -> list[Step]:
    """Show mean, standard error and ends of the population from those of its strata."""
    pairs = list(zip(found.samples, found.parts, strict=True))
    shares = [Quantity(f"W {s.stratum}", "share of the population", s.weight) for s, _ in pairs]

    def of(name: str, words: str, values: list[float | None]) -> list[Quantity]:
        return [
            Quantity(f"{name} {s.stratum}", words, value, unit)
            for (s, _), value in zip(pairs, values, strict=True)
            if value is not None
        ]

    means = of("mean", "of the stratum", [part.mean for _, part in pairs])
    errors = of("SE", "of the stratum", [part.standard_error for _, part in pairs])
    lows = of("low", "end of the stratum", [part.low for _, part in pairs])
    highs = of("high", "end of the stratum", [part.high for _, part in pairs])
    whole, low = found.whole, "mean − √(Σ W²·(mean − low)²)"
    if found.method == "order-statistics":
        low = f"the lower of {low}, by the lines of logs and of values"
        known = [part.numbers for _, part in pairs]
        lows = of("low by logs", "end of the stratum", [k["low_logs"] for k in known])
        lows += of("mean by values", "of the stratum", [k["mean_values"] for k in known])
        lows += of("low by values", "end of the stratum", [k["low_values"] for k in known])
    return [
        _step("mean", "Mean of the population", "mean = Σ W·mean", [*shares, *means], whole.mean,
              unit, _STRATA),
        _step("SE", "Standard error of the mean", "SE = √(Σ W²·SE²)", [*shares, *errors],
              whole.standard_error, unit, _STRATA),
        *_ends(
            whole,
            [
                ("low", low, [*shares, *means, *lows]),
                ("high", "mean + √(Σ W²·(high − mean)²)", [*shares, *means, *highs]),
            ],
            mark="", unit=unit, source=_COMBINE,
        ),
    ]  # fmt: skip
