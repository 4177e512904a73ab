"""Which sheet of a file holds the results, and which of its columns are ours."""

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from fieldplan.base.errors import LabError
from fieldplan.campaign.model import Campaign
from fieldplan.lab.columns import LAB_COLUMNS, UNKNOWN, Remedy, find_columns, plain_name
from fieldplan.lab.letterhead import Certificate, no_header
from fieldplan.lab.tables import TextTable, capped, read_tables
from fieldplan.lab.words import listed

REQUIRED = ("analyte", "as_reported", "unit", "location_id|sample_id")


def pilot_titles(campaign: Campaign) -> dict[str, tuple[str, ...]]:
    """Give the titles that the campaign file says for columns of its pilots, by our name.

    Parameters
    ----------
    campaign : Campaign
    """
    titles: dict[str, dict[str, None]] = {}
    for sigma in campaign.sigma:
        for ours, theirs in sigma.columns.items():
            titles.setdefault(ours, {})[theirs] = None
    return {ours: tuple(theirs) for ours, theirs in titles.items()}


OF_PILOTS_ONLY = "collected_on"
"""Read in pilots only: in results a day in another order must not stop an estimate."""


@dataclass(frozen=True)
class Named:
    """What was said for this file, and what was said for a pilot, which may be of another form.

    Parameters
    ----------
    told : mapping of str to str
        Our name to the file's.
    of_pilots : mapping of str to tuple of str
        The same of the campaign's pilots; more than one where they differ.
    remedy : callable
        Says where to write what a column is called.
    of_pilot : bool
        The file is a pilot; the day of collection is looked at there only.
    """

    told: Mapping[str, str]
    of_pilots: Mapping[str, tuple[str, ...]]
    remedy: Remedy
    of_pilot: bool = True

    def how(self) -> str:
        """Say how to tell which columns are which, none of which can be guessed."""
        return self.remedy({need.split("|")[-1]: UNKNOWN for need in REQUIRED})

    def titles(self) -> dict[str, tuple[str, ...]]:
        """Give all titles that may mean a column of ours."""
        return {**self.of_pilots, **{ours: (theirs,) for ours, theirs in self.told.items()}}

    def reused(self, table: TextTable) -> dict[str, str]:
        """Give what a pilot's columns say of this table: titles that it has, once."""
        theirs = [plain_name(cell) for cell in table.header]
        taken = {plain_name(title) for title in self.told.values()}
        reused = {}
        for ours, titles in self.of_pilots.items():
            here = [t for t in titles if theirs.count(plain_name(t)) == 1]
            free = ours != OF_PILOTS_ONLY and ours not in self.told
            if free and len(here) == 1 and plain_name(here[0]) not in taken:
                reused[ours] = here[0]
        return reused


def choose_sheet(
    path: Path, named: Named, certificate: Certificate
) -> tuple[TextTable, dict[str, int], tuple[str, ...]]:
    """Take the one table that has our columns; refuse where several have them.

    Parameters
    ----------
    path : Path
    named : Named
    certificate : Certificate

    Returns
    -------
    table : TextTable
    found : dict of str to int
        At which index each of our columns stands.
    notes : tuple of str

    Raises
    ------
    LabError
        No sheet has the columns, or several have.
    """
    tables = read_tables(path, certificate=certificate)
    fitting: list[tuple[TextTable, dict[str, int]]] = []
    faults: list[str] = []
    for table in tables:
        head = f"sheet '{table.sheet}': " if len(tables) > 1 else ""
        renamed = {**named.reused(table), **named.told}
        try:
            found = find_columns(table, LAB_COLUMNS, REQUIRED, renamed=renamed, remedy=named.remedy)
            if not named.of_pilot:
                found.pop(OF_PILOTS_ONLY, None)
            fitting.append((table, found))
        except LabError as fault:
            rows = [(table.header_row, table.header), *table.rows]
            faults += [
                head + line for line in no_header(path.name, rows, certificate) or fault.problems
            ]
    if not fitting:
        raise LabError(*capped(faults))
    if len(fitting) > 1:
        names = listed([f"'{table.sheet}'" for table, _ in fitting])
        message = (
            f"{path.name} has results on several sheets ({names}); put them on one sheet, or "
            "save the one that counts as a file of its own."
        )
        raise LabError(message)
    table, found = fitting[0]
    notes = []
    others = [f"'{t.sheet}'" for t in tables if t is not table]
    if others:
        notes.append(f"{path.name}: sheet '{table.sheet}' was read, {listed(others)} was not.")
    reused = [f"'{theirs}' as {ours}" for ours, theirs in named.reused(table).items()]
    if reused:
        notes.append(
            f"{path.name}: columns were read as the campaign file says of the pilot: "
            f"{listed(reused)}."
        )
    return table, found, tuple(notes)
