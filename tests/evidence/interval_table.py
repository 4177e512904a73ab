"""The coverage table of the intervals for a mean: worst population of each class, by n.

``python -m tests.evidence.interval_table`` prints the tables of docs/evidence/intervals.md and
writes fieldplan/stats/widened_table.py. ``--repetitions`` sets the samples a cell (60,000 unless
given; the standard error of a cell is √(p (1 − p) / R)), ``--drawn`` how many populations are drawn
at random besides the listed ones; their seed is another one than that of the fit.
"""

import argparse
import sys
from collections import defaultdict
from pathlib import Path

import numpy as np

from fieldplan.stats.intervals import IntervalKind
from tests.evidence.interval_coverage import Population, drawn, held, of_class, populations
from tests.evidence.random_populations import random_population, shown_to

SIZES = (5, 8, 10, 15, 20, 30, 50, 100, 200)
KINDS: tuple[IntervalKind, ...] = ("two-sided", "upper-limit", "lower-limit")
LEVELS = (0.90, 0.95, 0.99)
OTHERS = ("Hall", "Student t", "Chebyshev")
HELD_OUT_SEED = 131
SHIPPED = Path(__file__).parents[2] / "fieldplan" / "stats" / "widened_table.py"

Key = tuple[str, IntervalKind, float, int]
Cells = dict[Key, list[tuple[float, float]]]


def members(name: str, many: int) -> list[tuple[str, Population]]:
    """List the populations of a class: those listed, then those drawn at random."""
    rng = np.random.default_rng([HELD_OUT_SEED, len(name) + int(name[-1])])
    found = [("listed", p) for p in populations() if of_class(p, name)]
    return found + [("drawn", random_population(rng, name)) for _ in range(many)]


def cells_of(name: str, group: list[Population], n: int, repetitions: int) -> Cells:
    """Score every rule on every population that n results may be promised for."""
    found: Cells = defaultdict(list)
    for seed, population in enumerate(group):
        if not shown_to(population, n):
            continue
        sums: dict[Key, list[float]] = defaultdict(lambda: [0.0, 0.0])
        for block in drawn(population, n, repetitions=repetitions, seed=seed):
            for kind in KINDS:
                for rule, level in [(name, c) for c in LEVELS] + [(r, 0.95) for r in OTHERS]:
                    kept, wide = held(population, rule, n, kind, found=block, confidence=level)
                    own = sums[rule, kind, level, n]
                    own[0] += kept
                    own[1] += wide
        for key, (kept_in_all, width) in sums.items():
            found[key].append((kept_in_all / repetitions, width / repetitions))
    return found


def row(head: str, found: Cells, rule: str, kind: IntervalKind, level: float) -> str:
    """Write worst coverage by n, with the mean width over Chebyshev's at 0.95."""
    parts = []
    for n in SIZES:
        own, bound = found[rule, kind, level, n], found["Chebyshev", kind, 0.95, n]
        ratio = np.mean([a[1] / b[1] for a, b in zip(own, bound, strict=True)])
        width = f" ({ratio:.2f})" if level == 0.95 else ""
        parts.append(f"{100 * min(one[0] for one in own):.1f}{width}")
    return f"| {head} | {' | '.join(parts)} |"


def shipped(name: str, found: Cells) -> list[str]:
    """Write the lines of the shipped table: n, worst and middle in units of 10⁻⁴."""
    lines = []
    for kind in KINDS:
        for level in LEVELS:
            for n in SIZES:
                shares = [one[0] for one in found[name, kind, level, n]]
                ends = f"{1e4 * min(shares):.0f} {1e4 * np.median(shares):.0f}"
                lines.append(f"{name} {kind} {level:g} {n} {ends}")
    return lines


def main() -> None:
    """Print the tables and write the shipped one."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--repetitions", type=int, default=60_000)
    parser.add_argument("--drawn", type=int, default=60)
    typed = parser.parse_args()
    lines, counts = [], {}
    for name in ("cv-up-to-1", "cv-up-to-2"):
        chosen = members(name, typed.drawn)
        groups = {w: [p for which, p in chosen if which == w] for w in ("listed", "drawn")}
        scored = {which: Cells() for which in groups}
        for which, group in groups.items():
            for n in SIZES:
                scored[which] |= cells_of(name, group, n, typed.repetitions)
                print(name, which, n, file=sys.stderr)
        both = {key: scored["listed"][key] + scored["drawn"][key] for key in scored["listed"]}
        lines += shipped(name, both)
        counts[name] = len(chosen)
        print_tables(name, groups, scored, both)
    write_shipped(lines, counts)


def print_tables(
    name: str, groups: dict[str, list[Population]], scored: dict[str, Cells], both: Cells
) -> None:
    """Print one table a class."""
    sizes = " | ".join(f"n = {n}" for n in SIZES)
    print(f"\n### {name}\n\n| populations | rule | nominal | kind | {sizes} |")
    print("| --- | --- | --- | --- |" + " ---: |" * len(SIZES))
    for kind in KINDS:
        for which, group in groups.items():
            head = f"{len(group)} {which} | skew-widened | 95 % | {kind}"
            print(row(head, scored[which], name, kind, 0.95))
        total = sum(len(group) for group in groups.values())
        for rule in OTHERS:
            print(row(f"{total} all | {rule} | 95 % | {kind}", both, rule, kind, 0.95))
        for level in (0.90, 0.99):
            head = f"{total} all | skew-widened | {100 * level:.0f} % | {kind}"
            print(row(head, both, name, kind, level))


def write_shipped(lines: list[str], counts: dict[str, int]) -> None:
    """Write the module that the package looks coverage up in."""
    text = '"""Written by tests/evidence/interval_table.py; see docs/evidence/intervals.md."""\n\n'
    text += f"POPULATIONS = {counts!r}\n".replace("'", '"')
    text += '"""Simulated of each class."""\n\n'
    text += 'TABLE = """\\\n' + "\n".join(lines) + '\n"""\n'
    text += (
        '"""Class, kind, confidence, n; held in the worst population and the middle one, 10⁻⁴."""\n'
    )
    SHIPPED.write_text(text, encoding="utf-8")


if __name__ == "__main__":
    main()
