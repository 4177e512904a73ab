"""Short ways to ask sizing a question in tests."""

from fieldplan.sizing.question import Part, Question

WEIGHTS = (0.64, 0.22, 0.14)
SIGMAS = (18.0, 45.0, 90.0)


def whole(sigma: float = 27.57, **part: object) -> tuple[Part, ...]:
    """One population."""
    return (Part("site", 1.0, sigma, **part),)  # type: ignore[arg-type]


def three(results: int | None = None, **part: object) -> tuple[Part, ...]:
    """Three strata."""
    return tuple(
        Part(name, weight, sigma, results=results, **part)  # type: ignore[arg-type]
        for name, weight, sigma in zip("abc", WEIGHTS, SIGMAS, strict=True)
    )


def ask(parts: tuple[Part, ...], value: float, **more: object) -> Question:
    """Ask for a standard error unless told otherwise."""
    target = more.pop("target", "standard_error")
    return Question(parts, target, value, **more)  # type: ignore[arg-type]
