"""Print the figures of docs/performance.md: ``python -m tests.benchmarks.record [SECTION]``."""

import sys
from collections.abc import Callable, Iterator

from tests.benchmarks.balanced import measured as measured_balanced
from tests.benchmarks.commands import timed_commands
from tests.benchmarks.correlation import measured as measured_correlation
from tests.benchmarks.money import measured as measured_money
from tests.benchmarks.near_normal import timed_findings
from tests.benchmarks.patches import measured as measured_patches
from tests.benchmarks.placement import COUNTS, VERTICES, measured
from tests.benchmarks.sizings import measure as timed_sizings
from tests.benchmarks.strata import measured as measured_strata


def placement() -> Iterator[str]:
    """Yield the table of the section "Placing points"."""
    yield "| corners | points | simulated | issued | geopandas | ratio simulated | ratio issued |"
    yield "| --- | --- | --- | --- | --- | --- | --- |"
    for vertices in VERTICES:
        for count in COUNTS:
            row = measured(vertices, count)
            yield (
                f"| {vertices:,} | {count:,} | {row.simulated * 1000:.1f} ms "
                f"| {row.issued * 1000:.1f} ms | {row.peer * 1000:.0f} ms "
                f"| {row.peer / row.simulated:.0f} | {row.peer / row.issued:.0f} |"
            )


def commands() -> Iterator[str]:
    """Yield the table of the section "Commands as whole processes"."""
    yield "| command | aim | shortest | bare interpreter | ratio |"
    yield "| --- | --- | --- | --- | --- |"
    for row in timed_commands():
        yield (
            f"| {row.name} | {row.aim_s:g} s | {row.seconds:.3f} s | {row.bare_s:.3f} s "
            f"| {row.ratio:.0f} |"
        )


def patches() -> Iterator[str]:
    """Yield the table of the section "Patches"."""
    yield "| work | aim | shortest | peer | its shortest | ratio |"
    yield "| --- | --- | --- | --- | --- | --- |"
    for row in measured_patches():
        yield (
            f"| {row.name} | {row.aim_s * 1000:g} ms | {row.seconds * 1000:.0f} ms | {row.peer} "
            f"| {row.peer_s * 1000:.0f} ms | {row.peer_s / row.seconds:.0f} |"
        )


def near_normal() -> Iterator[str]:
    """Yield the table of the section "Is the mean near normal"."""
    yield "| work | aim | shortest | plain simulation of one shape | ratio |"
    yield "| --- | --- | --- | --- | --- |"
    for row in timed_findings():
        yield (
            f"| {row.name} | {row.aim_s * 1000:g} ms | {row.seconds * 1000:.1f} ms "
            f"| {row.peer_s * 1000:.0f} ms | {row.ratio:.1f} |"
        )


def money() -> Iterator[str]:
    """Yield the table of the section "Money"."""
    yield "| work | aim | shortest | peer | its shortest | ratio |"
    yield "| --- | --- | --- | --- | --- | --- |"
    for row in measured_money():
        yield (
            f"| {row.name} | {row.aim_s * 1000:g} ms | {row.seconds * 1000:.1f} ms | {row.peer} "
            f"| {row.peer_s * 1000:.1f} ms | {row.peer_s / row.seconds:.1f} |"
        )


def correlation() -> Iterator[str]:
    """Yield the table of the section "Correlation"."""
    yield "| work | aim | shortest | peer | its shortest | ratio |"
    yield "| --- | --- | --- | --- | --- | --- |"
    for row in measured_correlation():
        yield (
            f"| {row.name} | {row.aim_s * 1000:g} ms | {row.seconds * 1000:.1f} ms | {row.peer} "
            f"| {row.peer_s * 1000:.1f} ms | {row.peer_s / row.seconds:.1f} |"
        )


def strata() -> Iterator[str]:
    """Yield the table of the section "A thousand strata"."""
    yield "| work | aim | shortest | peer | its shortest | ratio |"
    yield "| --- | --- | --- | --- | --- | --- |"
    for row in measured_strata():
        yield (
            f"| {row.name} | {row.aim_s * 1000:g} ms | {row.seconds * 1000:.0f} ms | {row.peer} "
            f"| {row.peer_s * 1000:.0f} ms | {row.peer_s / row.seconds:.1f} |"
        )


def balanced() -> Iterator[str]:
    """Yield the table of the section "Balanced lists"."""
    yield "| work | aim | shortest | looking everywhere | ratio |"
    yield "| --- | --- | --- | --- | --- |"
    for row in measured_balanced():
        aim = f"{row.aim_s:g} s" if row.aim_s else "—"
        peer = f"{row.peer_s:.2f} s" if row.peer_s else "—"
        ratio = f"{row.peer_s / row.seconds:.0f}" if row.peer_s else "—"
        yield f"| {row.name} | {aim} | {row.seconds:.2f} s | {peer} | {ratio} |"


def sizings() -> Iterator[str]:
    """Yield the table of the section "One answer of each question"."""
    yield "| question | aim | shortest |"
    yield "| --- | --- | --- |"
    for row in timed_sizings():
        yield f"| {row.question} | 20 ms | {1000 * row.shortest:.1f} ms |"


SECTIONS: dict[str, Callable[[], Iterator[str]]] = {
    "placement": placement,
    "commands": commands,
    "patches": patches,
    "near-normal": near_normal,
    "money": money,
    "correlation": correlation,
    "strata": strata,
    "balanced": balanced,
    "sizings": sizings,
}

if __name__ == "__main__":
    for name in sys.argv[1:] or SECTIONS:
        for line in SECTIONS[name]():
            print(line, flush=True)
