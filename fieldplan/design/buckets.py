"""Who stands nearest: places in whole centimetres, sorted into square buckets."""

import math
from collections.abc import Iterator, Sequence

Entry = tuple[int, int, int]
"""Easting, northing and number of a place."""

_FAR = 1 << 100


class Buckets:
    """Places that can be taken away, and their nearest neighbours among those that are left.

    Parameters
    ----------
    eastings, northings : sequence of int
        Of all places, in centimetres; a place is known by its position in them.
    members : sequence of int
        Numbers of the places to sort in; at least one.

    Notes
    -----
    Distances are compared as whole squares. Of places equally far the one with the lowest number
    is nearest, so the answer does not depend on the buckets.
    """

    def __init__(
        self, eastings: Sequence[int], northings: Sequence[int], members: Sequence[int]
    ) -> None:
        self._easts, self._norths = eastings, northings
        east = [eastings[i] for i in members]
        north = [northings[i] for i in members]
        west, south, count = min(east), min(north), len(members)
        width, height = max(east) - west + 1, max(north) - south + 1
        # About two places a bucket, and never many more buckets than places.
        side = max(math.isqrt(2 * width * height // count), max(width, height) // count + 1)
        self._side = side
        self._rows, self._columns = height // side + 3, width // side + 3
        self._buckets: list[list[Entry]] = [[] for _ in range(self._rows * self._columns)]
        self._at = {}
        for e, n, i in zip(east, north, members, strict=True):
            bucket = ((e - west) // side + 1) * self._rows + (n - south) // side + 1
            self._at[i] = bucket
            self._buckets[bucket].append((e, n, i))

    def take(self, number: int) -> None:
        """Take a place away."""
        entry = self._easts[number], self._norths[number], number
        self._buckets[self._at[number]].remove(entry)

    def nearest(self, number: int) -> int:
        """Return the number of the place nearest to this one; there must be another."""
        east, north, at = self._easts[number], self._norths[number], self._at[number]
        rows, buckets = self._rows, self._buckets
        near, other, ring = _FAR, -1, 1
        block = (
            buckets[at - rows - 1] + buckets[at - rows] + buckets[at - rows + 1]
            + buckets[at - 1] + buckets[at] + buckets[at + 1]
            + buckets[at + rows - 1] + buckets[at + rows] + buckets[at + rows + 1]
        )  # fmt: skip
        while True:
            for e, n, i in block:
                away = (e - east) * (e - east) + (n - north) * (n - north)
                if away <= near and i != number and (away < near or i < other):
                    near, other = away, i
            if near <= (ring * self._side) ** 2 or ring > max(rows, self._columns):
                return other
            ring += 1
            block = [entry for bucket in self._ring(at, ring) for entry in bucket]

    def nearest_few(self, number: int, few: int) -> list[tuple[int, int]]:
        """Return up to ``few`` nearest places as (squared distance, number), nearest first."""
        east, north, at = self._easts[number], self._norths[number], self._at[number]
        found: list[tuple[int, int]] = []
        for ring in range(max(self._rows, self._columns) + 1):
            found += [
                ((e - east) ** 2 + (n - north) ** 2, i)
                for bucket in self._ring(at, ring)
                for e, n, i in bucket
                if i != number
            ]
            if len(found) >= few:
                found.sort()
                if found[few - 1][0] <= (ring * self._side) ** 2:
                    return found[:few]
        return sorted(found)[:few]

    def _ring(self, at: int, ring: int) -> Iterator[list[Entry]]:
        """Yield the buckets ``ring`` steps away, sideways, upwards or both."""
        column, row = divmod(at, self._rows)
        low, high = max(0, row - ring), min(self._rows - 1, row + ring)
        for c in range(max(0, column - ring), min(self._columns - 1, column + ring) + 1):
            whole = abs(c - column) == ring
            for r in range(low, high + 1) if whole else {row - ring, row + ring}:
                if low <= r <= high:
                    yield self._buckets[c * self._rows + r]
