"""The numbers typed for ``fieldplan size``: what belongs together, and the question they make."""

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, cast

from fieldplan.cli.size_options import BadOption, number

if TYPE_CHECKING:
    from fieldplan.campaign.model import Campaign
    from fieldplan.sizing.question import Part, Question, TargetKind
    from fieldplan.stats.allocation import Allocation

ALLOCATIONS = ("proportional", "neyman", "cost-optimal", "equal-precision")
TARGETS: "tuple[TargetKind, ...]" = (
    "standard_error",
    "half_width",
    "relative_half_width",
    "budget",
)


def refuse_unknown_question(question: str) -> None:
    """Refuse a question that there is not, naming the one that is near or all of them."""
    from difflib import get_close_matches

    from fieldplan.campaign.questions import MODULES

    known = ["mean", *MODULES]
    if question not in known:
        near = get_close_matches(question, known, n=1)
        hint = f"Did you mean {near[0]}?" if near else f"Takes {', '.join(known)}."
        message = f"--question {question!r} is not known. {hint}"
        raise BadOption(message)


@dataclass(frozen=True)
class BareNumbers:
    """What was typed; ``question`` checks that it belongs together."""

    sigma: float | None
    standard_error: float | None
    half_width: float | None
    relative_half_width: float | None
    budget: float | None
    mean: float | None
    confidence: float | None
    one_sided: bool
    population: int | None
    pilot_n: int | None
    assurance: float | None
    stratum: tuple[str, ...]
    allocation: str | None
    floor: int | None
    unit: str | None
    question: str
    with_keys: tuple[str, ...]
    level: float | None
    area: float | None
    layout: str | None
    skewness: float | None
    excess_kurtosis: float | None

    def check_question(self) -> None:
        """Refuse a question that nobody asks here, and targets of a mean beside another one."""
        self._check()
        if self.question == "mean":
            return
        refuse_unknown_question(self.question)
        for kind in (*TARGETS, "assurance"):
            if getattr(self, kind) is not None:
                message = (
                    f"--{kind.replace('_', '-')} belongs to the question 'mean', not to "
                    f"'{self.question}'; leave it out."
                )
                raise BadOption(message)

    def refuse_idle(self) -> None:
        """Refuse what the plain question about a mean does not look at."""
        kind, _ = self.target()
        idle = {"level": self.level, "area": self.area, "layout": self.layout}
        if kind != "relative_half_width":
            idle["mean"] = self.mean
        for name, value in idle.items():
            if value is not None:
                shown = f"--{name} {value:g}" if isinstance(value, float) else f"--{name} {value}"
                purpose = "--relative-half-width, --question or --more"
                if name != "mean":
                    purpose = "--question or --more"
                message = f"{shown} serves {purpose} only; leave it out."
                if name == "level":
                    message = (
                        f"{shown} does not change how precise a mean is; leave it out, or ask "
                        "--question mean-and-level."
                    )
                raise BadOption(message)

    def parts(self) -> "tuple[Part, ...]":
        """Give the whole, or its strata; sigma is 0 where nobody typed one."""
        return self._strata() if self.stratum else (self._whole(),)

    def as_question(self, campaign: "Campaign | None" = None) -> "Question":
        """Turn the options into the question about a mean.

        Parameters
        ----------
        campaign : Campaign, optional
            The campaign that they make, with what ``--with`` says of design and prices.
        """
        from fieldplan.sizing.question import Question

        kind, value = self.target()
        parts = self.parts()
        if kind == "standard_error" and self.assurance and any(p.results is None for p in parts):
            message = (
                f"--assurance {self.assurance:g} needs to know how well sigma is known; add "
                + ("a third number to every --stratum." if self.stratum else "--pilot-n.")
            )
            raise BadOption(message)
        if campaign is not None:
            from fieldplan.sizing.asking import NO_TARGET
            from fieldplan.sizing.campaign_question import ask

            return replace(
                ask(campaign, NO_TARGET, parts=parts, mean=self.mean),
                target=kind,
                value=value,
                assurance=self.assurance,
                analyte="",
                unit=self.unit or "",
            )
        return Question(
            parts=parts,
            target=kind,
            value=value,
            mean=self.mean,
            assurance=self.assurance,
            confidence=self.confidence or 0.95,
            interval="upper-limit" if self.one_sided else "two-sided",
            allocation=cast("Allocation", self.allocation or "proportional"),
            floor=self.floor or 2,
            unit=self.unit or "",
        )

    def target(self) -> "tuple[TargetKind, float]":
        """Give the one target of a mean, and its number."""
        given = [(kind, getattr(self, kind)) for kind in TARGETS if getattr(self, kind)]
        if len(given) != 1:
            names = " and ".join(f"--{kind.replace('_', '-')}" for kind, _ in given)
            message = (
                f"{names} are both given; keep one target."
                if given
                else "no target: give --standard-error, --half-width, --relative-half-width or "
                "--budget."
            )
            if not given and any(key.startswith("design.locations") for key in self.with_keys):
                message = (
                    "fixed locations are held against a target: add the one that you would like, "
                    "such as --standard-error 6; the answer says what the locations reach."
                )
            raise BadOption(message)
        kind, value = given[0]
        if kind == "relative_half_width" and self.mean is None:
            message = f"--relative-half-width {value:g} is a share of the mean; add --mean."
            raise BadOption(message)
        if kind == "budget" and not any(key.startswith("cost.") for key in self.with_keys):
            message = (
                f"--budget {value:g} needs prices; add --with cost.currency=EUR "
                "--with cost.per_location=28 --with cost.per_analysis=46, with yours."
            )
            raise BadOption(message)
        if kind == "budget" and self.assurance is not None:
            message = (
                f"--assurance {self.assurance:g} beside --budget: money sets no precision that n "
                "could miss; leave it out."
            )
            raise BadOption(message)
        return kind, value

    def _check(self) -> None:
        """Refuse options that do not go together."""
        if self.question == "mean" and self.sigma is None and not self.stratum:
            message = (
                "give a campaign file, or bare numbers such as --sigma 27.57 --standard-error 6."
            )
            raise BadOption(message)
        if self.allocation not in (None, *ALLOCATIONS):
            message = (
                f"--allocation {self.allocation!r} is unknown; write {', '.join(ALLOCATIONS[:-1])} "
                f"or {ALLOCATIONS[-1]}."
            )
            raise BadOption(message)
        if self.allocation == "cost-optimal" and not any("cost." in k for k in self.with_keys):
            message = (
                "--allocation cost-optimal weighs what results cost; add --with cost.currency=EUR "
                "--with cost.per_location=30 and, where a stratum differs, "
                "--with 'cost.per_location_by_stratum.stratum 2=90'."
            )
            raise BadOption(message)
        alone = {"--sigma": self.sigma, "--population": self.population, "--pilot-n": self.pilot_n}
        shared = {"--allocation": self.allocation, "--floor": self.floor}
        for name, value in (alone if self.stratum else shared).items():
            if value is not None:
                shown = f"{name} {value:g}" if isinstance(value, float) else f"{name} {value}"
                message = (
                    f"{shown} speaks of one whole, and --stratum of its parts; give sigma "
                    "and the pilot's n inside each --stratum, a list in a campaign file."
                    if self.stratum
                    else f"{shown} shares n between strata; add a --stratum for each."
                )
                raise BadOption(message)

    def _whole(self) -> "Part":
        from fieldplan.sizing.question import Part

        return Part(
            "site",
            1.0,
            self.sigma or 0.0,
            results=self.pilot_n,
            population=self.population,
            mean=self.mean,
            skewness=self.skewness,
            excess_kurtosis=self.excess_kurtosis,
        )

    def _strata(self) -> "tuple[Part, ...]":
        from fieldplan.sizing.question import Part

        rows = [_stratum_numbers(text) for text in self.stratum]
        total = math.fsum(row[0] for row in rows)
        if abs(total - 1) > 0.0011:
            message = (
                f"the weights of --stratum sum to {total:.6g}; they are shares of the whole and "
                "must sum to 1."
            )
            raise BadOption(message)
        return tuple(
            Part(
                f"stratum {k}",
                weight / total,
                sigma,
                results=results,
                skewness=self.skewness,
                excess_kurtosis=self.excess_kurtosis,
            )
            for k, (weight, sigma, results) in enumerate(rows, start=1)
        )


def _stratum_numbers(text: str) -> tuple[float, float, int | None]:
    """Read ``WEIGHT,SIGMA`` or ``WEIGHT,SIGMA,PILOT_N``."""
    pieces = [piece.strip() for piece in text.split(",")]
    if len(pieces) not in (2, 3):
        message = (
            f"--stratum {text!r} has {len(pieces)} numbers; write WEIGHT,SIGMA such as 0.64,18, "
            "or WEIGHT,SIGMA,PILOT_N, with decimal points."
        )
        raise BadOption(message)
    name = f"--stratum {text!r}:"
    weight, sigma = number(pieces[0], name), number(pieces[1], name)
    results = number(pieces[2], name) if len(pieces) == 3 else None
    if not 0 < weight <= 1:
        message = f"--stratum {text!r}: weight {weight:g} must be above 0 and at most 1."
        raise BadOption(message)
    if sigma <= 0:
        message = f"--stratum {text!r}: sigma {sigma:g} must be above 0."
        raise BadOption(message)
    if results is not None and (results < 2 or results != int(results)):
        message = f"--stratum {text!r}: the pilot's n {results:g} must be whole, 2 or more."
        raise BadOption(message)
    return weight, sigma, None if results is None else int(results)
