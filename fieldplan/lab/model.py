"""What laboratories said, cell by cell, and what a pilot says about spread."""

from dataclasses import dataclass
from datetime import date

from fieldplan.stats.time_series import rho_at


@dataclass(frozen=True)
class LabRow:
    """One result as reported, with what was read from it.

    Parameters
    ----------
    row : int
        Row in the file as a spreadsheet counts it (the header is row 1).
    location_id, sample_id : str
        As written; empty when the column is absent.
    analyte : str
        The campaign's analyte id.
    as_reported : str
        The cell's text, untouched.
    result : float or None
        The number in the campaign's unit; None for a non-detect.
    detected : bool
        False for ``<0.5``, ND and their kin.
    reporting_limit : float or None
        In the campaign's unit; always given where ``detected`` is False.
    unit : str
        The campaign's unit, after conversion.
    role : str
        ``field sample``, ``field duplicate``, ``equipment blank`` …
    duplicate_of : str
        Sample or location that this one duplicates; empty otherwise.
    stratum : str
        As written; empty when absent.
    latitude, longitude : float or None
    qualifier_lab : str
        Letters that the laboratory put beside the number.
    collected_on : date or None
        Day on which the sample was taken.
    """

    row: int
    location_id: str
    sample_id: str
    analyte: str
    as_reported: str
    result: float | None
    detected: bool
    reporting_limit: float | None
    unit: str
    role: str = "field sample"
    duplicate_of: str = ""
    stratum: str = ""
    latitude: float | None = None
    longitude: float | None = None
    qualifier_lab: str = ""
    collected_on: date | None = None


REJECTED = "rejected by the laboratory, qualifier R"
OTHER_ANALYTE = "of an analyte that the campaign does not know"


@dataclass(frozen=True)
class LeftOutRow:
    """A row of the laboratory's file that is not in any mean, and why, as it was written.

    Parameters
    ----------
    row : int
    written_id : str
        Of the sample, else of the location.
    analyte : str
        The campaign's id, or the laboratory's name where the campaign has none.
    as_reported : str
        The cell.
    why : str
    """

    row: int
    written_id: str
    analyte: str
    as_reported: str
    why: str

    @property
    def in_words(self) -> str:
        """Its id, value and row, for a sentence; the analyte where it is none of the campaign's."""
        what = f"{self.analyte} " if self.why == OTHER_ANALYTE else ""
        return f"'{self.written_id}' with {what}'{self.as_reported}' (row {self.row})"


@dataclass(frozen=True)
class LabTable:
    """All rows of one file, in file order, with the file's name, its hash and reading notes.

    Parameters
    ----------
    file_name, sha256 : str
    rows : tuple of LabRow
        Of the campaign's analytes, without those that the laboratory rejected.
    notes : tuple of str
    rejected : tuple of LabRow
        Results that the laboratory rejected (qualifier R), where their cells can be read.
    left_out : tuple of LeftOutRow
        All rejected results, and all rows of analytes that the campaign does not know.
    """

    file_name: str
    sha256: str
    rows: tuple[LabRow, ...]
    notes: tuple[str, ...] = ()
    rejected: tuple[LabRow, ...] = ()
    left_out: tuple[LeftOutRow, ...] = ()


@dataclass(frozen=True)
class VisitCorrelation:
    """How far visits that follow each other resemble each other, as a campaign declares.

    Parameters
    ----------
    rho : float
        Correlation of two visits ``days`` apart.
    days : float or None
        None where the planned visits are as far apart as those that ``rho`` belongs to.
    planned_days : float or None
        Days between the planned visits.
    """

    rho: float
    days: float | None = None
    planned_days: float | None = None

    @property
    def planned_rho(self) -> float:
        """The correlation of neighbouring planned visits."""
        if self.days is None or self.planned_days is None:
            return self.rho
        return rho_at(self.rho, from_days=self.days, to_days=self.planned_days)


@dataclass(frozen=True)
class StratumSpread:
    """Sigma of one analyte in one stratum (or the site), and how well it is known.

    Parameters
    ----------
    analyte, stratum : str
        ``stratum`` is ``site`` for the whole.
    sigma : float
        What sizing uses: the largest s over non-detects at 0, half and the limit.
    mean : float or None
        Of ``values``, so with non-detects at half the limit, or the expected mean as typed.
    results : int or None
        Number of results n0 behind sigma; None when it was typed without one.
    source : str
        The pilot file, the typed source, or ``ASSUMED``.
    assumed : bool
        True stamps the sheet.
    values : tuple of float
        Location values (duplicates averaged), non-detects at half the limit; empty when typed.
    detected : tuple of bool
        Which of ``values`` were detected.
    sigma_at_zero, sigma_at_half, sigma_at_limit : float or None
    skewness : float or None
        Sample skewness g1 (bias-corrected G1 is not used here), or as typed.
    skewness_ceiling : float or None
        The largest skewness that n0 values can show, (n0 − 2)/√(n0 − 1).
    excess_kurtosis : float or None
        As declared; never estimated, since a pilot cannot show its tail.
    positions : tuple of (tuple of float or None)
        Latitude and longitude of each of ``values``; empty when typed.
    days : tuple of (date or None)
        When each of ``values`` was collected; empty when typed.
    visits : VisitCorrelation or None
        As declared for visits in a row.
    """

    analyte: str
    stratum: str
    sigma: float
    mean: float | None
    results: int | None
    source: str
    assumed: bool = False
    values: tuple[float, ...] = ()
    detected: tuple[bool, ...] = ()
    sigma_at_zero: float | None = None
    sigma_at_half: float | None = None
    sigma_at_limit: float | None = None
    skewness: float | None = None
    skewness_ceiling: float | None = None
    excess_kurtosis: float | None = None
    positions: tuple[tuple[float, float] | None, ...] = ()
    days: tuple[date | None, ...] = ()
    visits: VisitCorrelation | None = None

    @property
    def degrees_of_freedom(self) -> int | None:
        """n0 − 1, or None when sigma was typed without a number of results."""
        return None if self.results is None else self.results - 1


@dataclass(frozen=True)
class ReadingPairs:
    """Readings of a cheap field method beside the laboratory's results at the same places.

    Parameters
    ----------
    name, analyte : str
        As in ``[[field_reading]]``.
    readings, results : tuple of float
        As many of the one as of the other; a non-detect stands at half its limit.
    source : str
        The file.
    non_detects : int
        Among the results.
    unpaired : int
        Rows that lack one of the two, left out.
    """

    name: str
    analyte: str
    readings: tuple[float, ...]
    results: tuple[float, ...]
    source: str
    non_detects: int = 0
    unpaired: int = 0


@dataclass(frozen=True)
class PartSpread:
    """One part of sigma: where it arises, how large it is and how well it is known.

    Parameters
    ----------
    part : str
        ``between-locations``, ``sampling``, ``analysis``; ``sampling and analysis`` where no
        sample was analysed twice, so that the two cannot be told apart.
    sigma : float
        0 where the estimate came out negative.
    source : str
    degrees_of_freedom : float or None
        Behind it; None when it was typed without a number of results.
    low, high : float or None
        Ends of its 90 % interval, as standard deviations; None when it was typed.
    cut_at_zero : bool
        The estimate of its variance was negative.
    assumed : bool
    """

    part: str
    sigma: float
    source: str
    degrees_of_freedom: float | None = None
    low: float | None = None
    high: float | None = None
    cut_at_zero: bool = False
    assumed: bool = False


@dataclass(frozen=True)
class SplitSpread:
    """Sigma of one analyte in one stratum by its parts, from the largest scale down.

    Parameters
    ----------
    analyte, stratum : str
    parts : tuple of PartSpread
    duplicated : int or None
        Locations with a second sample behind it; None when every part was typed.
    typed : bool
        The campaign file has a ``[[sigma]]`` table for a part.
    """

    analyte: str
    stratum: str
    parts: tuple[PartSpread, ...]
    duplicated: int | None = None
    typed: bool = False

    def part(self, name: str) -> PartSpread | None:
        """Return one part; None where nothing tells it."""
        return next((entry for entry in self.parts if entry.part == name), None)


@dataclass(frozen=True)
class Spread:
    """Sigma for every stratum of the deciding analyte, and what the pilot says in sentences.

    ``strata`` is in the frame's order, one entry per stratum. ``site`` is the whole (always
    present where a pilot or a site-wide value was given). ``sentences`` and ``notes`` print.
    ``splits`` has the parts of sigma where duplicates or the campaign file tell them;
    ``increments`` is above 1 where every sigma is that of a composite of so many.
    ``pairs`` are those of field readings that a file calibrates.
    """

    analyte: str
    unit: str
    strata: tuple[StratumSpread, ...]
    site: StratumSpread | None = None
    others: tuple[StratumSpread, ...] = ()
    sentences: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()
    pairs: tuple[ReadingPairs, ...] = ()
    splits: tuple[SplitSpread, ...] = ()
    increments: int = 1

    def stratum(self, name: str) -> StratumSpread:
        """Return the spread of the stratum called ``name``; KeyError when there is none."""
        for entry in self.strata:
            if entry.stratum == name:
                return entry
        raise KeyError(name)

    def split(self, analyte: str, stratum: str) -> SplitSpread | None:
        """Return the parts of an analyte's sigma in one stratum; None where nothing tells them."""
        return next((s for s in self.splits if (s.analyte, s.stratum) == (analyte, stratum)), None)
