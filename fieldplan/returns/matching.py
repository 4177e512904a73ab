"""Which laboratory row belongs to which planned sample; likeness is proposed, never applied."""

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass, field

from fieldplan.base.errors import LabError
from fieldplan.lab.model import LabRow
from fieldplan.plan.model import Plan
from fieldplan.returns.ids import likeness, nearest, plain_id
from fieldplan.returns.laboratory import id_as_written
from fieldplan.returns.model import ConfirmedId, NearMatch
from fieldplan.returns.revisions import of_other_revisions
from fieldplan.samples.model import Sample


@dataclass(frozen=True)
class ConfirmedMatch:
    """One line of ``matches.csv``: what the user says of one proposal; None while unanswered.

    ``by`` is who said so, empty where the file names nobody.
    """

    row: int
    as_written: str
    proposed: str
    confirmed: bool | None
    by: str = ""


@dataclass
class Matching:
    """Rows by the sample they belong to, and those that belong to none or are not sure."""

    by_sample: dict[str, list[LabRow]] = field(default_factory=dict)
    extra: list[LabRow] = field(default_factory=list)
    near: list[NearMatch] = field(default_factory=list)
    confirmed: list[ConfirmedId] = field(default_factory=list)

    def add(self, sample_id: str, row: LabRow) -> None:
        """Note that a row is the result of a sample."""
        self.by_sample.setdefault(sample_id, []).append(row)

    @property
    def matched(self) -> int:
        """Number of rows that belong to a planned sample."""
        return sum(len(rows) for rows in self.by_sample.values())

    @property
    def undecided(self) -> int:
        """Number of rows that wait for the user, however many proposals each has."""
        return len({match.row for match in self.near})


def match_rows(
    plan: Plan,
    rows: Sequence[LabRow],
    *,
    analyte: str,
    confirmed: Sequence[ConfirmedMatch] = (),
    elsewhere: Sequence[LabRow] = (),
) -> Matching:
    """Set laboratory rows against planned samples.

    Parameters
    ----------
    plan : Plan
    rows : sequence of LabRow
        Of one analyte, the laboratory's own control rows left out.
    analyte : str
        Only samples that are to be analysed for it count.
    confirmed : sequence of ConfirmedMatch
    elsewhere : sequence of LabRow
        Rows of the same file about other analytes. What was answered for one of them holds for
        every row that names its jar in the same way.

    Returns
    -------
    Matching

    Raises
    ------
    LabError
        A confirmed match does not fit the file or the plan, or was never proposed; a row bears
        an id of another revision of the plan.

    Notes
    -----
    In this order: the exact sample id; what the user confirmed; the exact location id where it
    leaves one sample. Whatever is left is compared by likeness and proposed. An answer counts
    where it would be proposed once all the other rows are answered.
    """
    strangers = of_other_revisions(plan, rows)
    if strangers:
        raise LabError(*strangers)
    matcher = _Matcher(plan, analyte)
    others = {row.row: row for row in elsewhere}
    own = matcher.decided(rows, [match for match in confirmed if match.row not in others])
    _check_rows([match for match in confirmed if match.row in others], others)
    decided = matcher.carried(rows, confirmed, others) | own
    strange = {
        row.row
        for row in rows
        if decided.get(row.row)
        and decided[row.row] not in _Matcher(plan, analyte).possible(row, rows, decided)
    }
    _refuse_never_proposed([row for row in rows if row.row in strange & own.keys()], own)
    decided = {number: name for number, name in decided.items() if number not in strange}
    found = matcher.match(rows, decided)
    found.confirmed = [
        ConfirmedId(row.row, id_as_written(row), decided[row.row], _said_by(row, confirmed, others))
        for row in rows
        if decided.get(row.row) and plain_id(row.sample_id) != decided[row.row]
    ]
    return found


def _said_by(row: LabRow, confirmed: Sequence[ConfirmedMatch], others: Mapping[int, LabRow]) -> str:
    """Name who confirmed a row, or the same jar under another analyte."""
    for match in confirmed:
        jar = others.get(match.row, row)
        if match.confirmed and match.by and (match.row == row.row or _jar(jar) == _jar(row)):
            return match.by
    return ""


def _refuse_never_proposed(rows: Sequence[LabRow], decided: Mapping[int, str]) -> None:
    """Refuse an answer to a question that was not asked: it would make any result anybody's."""
    problems = [
        f"matches.csv: row {row.row} '{id_as_written(row)}' was never proposed as "
        f"{decided[row.row]}. Answer what was proposed; where an id is wrong, ask the laboratory "
        "for a corrected report."
        for row in rows
    ]
    if problems:
        raise LabError(*problems)


def _jar(row: LabRow) -> tuple[str, str, str]:
    """Give all that a row says of its jar: two rows that say the same speak of one."""
    return plain_id(row.sample_id), plain_id(row.location_id), row.role


def _check_rows(confirmed: Sequence[ConfirmedMatch], by_number: Mapping[int, LabRow]) -> None:
    """Refuse answers to rows that do not hold the id answered for."""
    problems = []
    for match in confirmed:
        row = by_number.get(match.row)
        if row is None or plain_id(id_as_written(row)) != plain_id(match.as_written):
            problems.append(
                f"matches.csv: row {match.row} '{match.as_written}' is not in this laboratory "
                "file. Delete matches.csv, run the command again and confirm anew."
            )
    if problems:
        raise LabError(*problems)


class _Matcher:
    def __init__(self, plan: Plan, analyte: str) -> None:
        self.samples = {s.sample_id: s for s in plan.samples.samples if analyte in s.analytes}
        self.at: dict[str, list[Sample]] = {}
        for sample in self.samples.values():
            self.at.setdefault(sample.location_id, []).append(sample)
        self.location_named = {p.location_id: p.location_id for p in plan.locations.places}
        for place in plan.locations.places:
            self.location_named.setdefault(place.short_name, place.location_id)
        self.rule = plan.campaign.rules.duplicates
        self.matching = Matching()

    def match(self, rows: Sequence[LabRow], decided: Mapping[int, str]) -> Matching:
        """Place all rows; propose what is left and not answered."""
        for row in self._place(rows, decided):
            proposals = self._proposals(row) if row.row not in decided else []
            if proposals:
                self.matching.near += proposals
            else:
                self.matching.extra.append(row)
        return self.matching

    def possible(
        self, row: LabRow, rows: Sequence[LabRow], decided: Mapping[int, str]
    ) -> Collection[str]:
        """Name the samples that a row can be once all the other rows are answered."""
        left = self._place(rows, {n: sample for n, sample in decided.items() if n != row.row})
        if row in left:
            return {near.proposed for near in self._proposals(row)}
        return {name for name, placed in self.matching.by_sample.items() if row in placed}

    def _place(self, rows: Sequence[LabRow], decided: Mapping[int, str]) -> list[LabRow]:
        """Match by sample id, then by answer, then by location; return the rest."""
        waiting = []
        for row in rows:
            sample_id = plain_id(row.sample_id)
            if sample_id in self.samples:
                self.matching.add(sample_id, row)
            elif decided.get(row.row):
                self.matching.add(decided[row.row], row)
            else:
                waiting.append(row)
        return self._by_location(waiting)

    def decided(
        self, rows: Sequence[LabRow], confirmed: Sequence[ConfirmedMatch]
    ) -> dict[int, str]:
        """Map a row's number to its sample; to an empty text when the user said no."""
        by_number = {row.row: row for row in rows}
        _check_rows(confirmed, by_number)
        decided: dict[int, str] = {}
        problems = []
        for match in confirmed:
            head = f"matches.csv: row {match.row} '{match.as_written}'"
            if match.confirmed:
                sample_id = self._sample_named(match.proposed)
                if not sample_id:
                    problems.append(
                        f"{head}: proposed '{match.proposed}' is no sample of the plan, nor a "
                        "location with one sample."
                    )
                elif decided.get(match.row):
                    problems.append(f"{head} is confirmed twice; say yes to one proposal.")
                decided[match.row] = sample_id
            elif match.confirmed is False:
                decided.setdefault(match.row, "")
        if problems:
            raise LabError(*problems)
        return decided

    def carried(
        self,
        rows: Sequence[LabRow],
        confirmed: Sequence[ConfirmedMatch],
        others: Mapping[int, LabRow],
    ) -> dict[int, str]:
        """Map rows to the sample that was confirmed for the same jar under another analyte."""
        said: dict[tuple[str, str, str], set[str]] = {}
        for match in confirmed:
            if match.row in others and match.confirmed is not None:
                named = self._sample_named(match.proposed) if match.confirmed else ""
                said.setdefault(_jar(others[match.row]), set()).add(named)
        decided = {}
        for row in rows:
            names = said.get(_jar(row), set())
            chosen = names - {""}
            if len(chosen) == 1 or names == {""}:
                decided[row.row] = chosen.pop() if chosen else ""
        return decided

    def _sample_named(self, written: str) -> str:
        name = plain_id(written)
        if name in self.samples:
            return name
        at_place = self.at.get(self.location_named.get(name, ""), [])
        return at_place[0].sample_id if len(at_place) == 1 else ""

    def _by_location(self, rows: Sequence[LabRow]) -> list[LabRow]:
        """Match what a location id settles; return the rest."""
        groups: dict[str, list[LabRow]] = {}
        rest = []
        for row in rows:
            place = self._place_of(row)
            if place and not self._sample_elsewhere(row, place):
                groups.setdefault(place, []).append(row)
            else:
                rest.append(row)
        for place, group in groups.items():
            rest += self._share_out(place, group)
        return sorted(rest, key=lambda row: row.row)

    def _place_of(self, row: LabRow) -> str:
        for written in (row.location_id, row.sample_id):
            place = self.location_named.get(plain_id(written), "")
            if place in self.at:
                return place
        return ""

    def _sample_elsewhere(self, row: LabRow, place: str) -> bool:
        """Whether the row's sample id looks like one of another location."""
        if not row.sample_id or plain_id(row.sample_id) in self.location_named:
            return False
        wanted = likeness(row.sample_id)
        alike = [s for s in self.samples.values() if likeness(s.sample_id) == wanted]
        return any(s.location_id != place for s in alike)

    def _share_out(self, place: str, rows: Sequence[LabRow]) -> list[LabRow]:
        """Give the rows of one location to its samples, where that leaves no doubt."""
        free = [s for s in self.at[place] if s.sample_id not in self.matching.by_sample]
        if len(self.at[place]) == 1:
            free = self.at[place]
        if len(free) == 1:
            for row in rows:
                self.matching.add(free[0].sample_id, row)
            return []
        by_role = {s.role: s for s in free}
        if len({row.role for row in rows}) == len(rows) and all(r.role in by_role for r in rows):
            named = len(rows) > 1 or rows[0].role == "field duplicate"
            if named or self.rule == "average":
                for row in rows:
                    self.matching.add(by_role[row.role].sample_id, row)
                return []
        if len(rows) <= len(free) and self.rule == "average":
            for sample, row in zip(free, rows, strict=False):
                self.matching.add(sample.sample_id, row)
            return []
        return list(rows)

    def _proposals(self, row: LabRow) -> list[NearMatch]:
        written = id_as_written(row)
        free = [s for s in self.samples if s not in self.matching.by_sample]
        names = {name: name for name in free}
        for name, place in self.location_named.items():
            at_place = [s for s in self.at.get(place, []) if s.sample_id in names]
            if len(at_place) == 1:
                names.setdefault(name, at_place[0].sample_id)
        tried = [plain_id(text) for text in (row.sample_id, row.location_id) if text]
        place = self._place_of(row)
        alike = {names[n] for n in names for t in tried if likeness(n) == likeness(t)}
        if alike:
            why = "same but for case, dashes, spaces, zeros or look-alike letters"
            return [NearMatch(row.row, written, name, why) for name in sorted(alike)]
        if place:
            rest = [s.sample_id for s in self.at[place] if s.sample_id in names]
            why = f"one of the samples of {place}"
            return [NearMatch(row.row, written, name, why) for name in rest]
        near = {names[name] for text in tried for name in nearest(text, names)}
        return [NearMatch(row.row, written, name, "nearest spelling") for name in sorted(near)[:3]]
