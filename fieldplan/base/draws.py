"""Random numbers that can be drawn again for years: one keyed stream per purpose, version 1.

numpy keeps the raw output of its bit generators for good, but not what it makes of it. So only
the raw 64-bit numbers of Philox come from numpy; all that follows is here, and frozen: a change
needs a new version beside this one.
"""

import hashlib
import unicodedata

import numpy as np
from numpy.typing import NDArray

VERSION = 1
"""The version of everything in this module, and the first word of every key."""


def key_text(seed: int, design: str, stratum: str, purpose: str) -> str:
    r"""Spell the key of one stream, as a person could write it.

    Parameters
    ----------
    seed : int
        From the campaign file.
    design, stratum : str
        Their ids, in Unicode normal form C.
    purpose : str
        What the numbers are for, e.g. ``places`` or ``unit MW-7``.

    Returns
    -------
    str
        The parts after ``fieldplan draw 1``, set apart by ``|``. A backslash or a ``|`` inside a
        part has a backslash put before it, so that no two keys read the same.

    Examples
    --------
    >>> key_text(20261102, "main", "yard", "places")
    'fieldplan draw 1|20261102|main|yard|places'
    >>> print(key_text(7, "main", "a|b", "places"))
    fieldplan draw 1|7|main|a\|b|places
    """
    parts = (str(int(seed)), design, stratum, purpose)
    spelled = (p.replace("\\", "\\\\").replace("|", "\\|") for p in parts)
    return unicodedata.normalize("NFC", "|".join((f"fieldplan draw {VERSION}", *spelled)))


class Stream:
    """An endless row of random numbers that depends on its key and on nothing else.

    Parameters
    ----------
    seed : int
    design, stratum, purpose : str
        See :func:`key_text`. Two streams that differ in any part are independent.

    Notes
    -----
    Philox4x64 with 10 rounds [1]_. Its two key words are the first and the second 8 bytes of the
    SHA-256 digest of the key text in UTF-8, each read with the highest byte first. The counter is
    1 for the first block of four numbers, 2 for the second, and so on.

    References
    ----------
    .. [1] Salmon, Moraes, Dror and Shaw (2011), Parallel random numbers: as easy as 1, 2, 3.
       Proceedings of SC11.

    Examples
    --------
    >>> Stream(1, "main", "site", "places").uniforms(2).round(6).tolist()
    [0.095573, 0.279666]
    """

    def __init__(self, seed: int, design: str, stratum: str, purpose: str) -> None:
        digest = hashlib.sha256(key_text(seed, design, stratum, purpose).encode()).digest()
        words = [int.from_bytes(digest[:8], "big"), int.from_bytes(digest[8:16], "big")]
        self._generator = np.random.Philox(key=np.array(words, dtype=np.uint64))

    def raw(self, count: int) -> NDArray[np.uint64]:
        """Return the next ``count`` raw numbers, each from 0 to 2**64 - 1."""
        return np.asarray(self._generator.random_raw(count), dtype=np.uint64)

    def uniforms(self, count: int) -> NDArray[np.float64]:
        """Return the next ``count`` numbers in [0, 1): the upper 53 bits times 2**-53."""
        return np.asarray((self.raw(count) >> np.uint64(11)) * 2.0**-53, dtype=np.float64)

    def below(self, bound: int) -> int:
        """Return a whole number from 0 to ``bound`` - 1, all equally likely.

        A raw number at or above the largest multiple of ``bound`` within 2**64 is passed over;
        the first one below it is divided by ``bound`` and the remainder returned.
        """
        if not 1 <= bound <= 2**64:
            message = f"bound is {bound}; it must lie between 1 and 2**64"
            raise ValueError(message)
        limit = 2**64 - 2**64 % bound
        while True:
            number = int(self._generator.random_raw())
            if number < limit:
                return number % bound

    def permutation(self, count: int) -> list[int]:
        """Return 0 … ``count`` - 1 in random order, every order equally likely.

        From the last position down to the second, position i changes places with position
        ``below(i + 1)`` (Durstenfeld 1964, Communications of the ACM 7, 420).
        """
        order = list(range(count))
        for i in range(count - 1, 0, -1):
            j = self.below(i + 1)
            order[i], order[j] = order[j], order[i]
        return order
