"""Errors that reach a person: which thing, what it is, what it must be, what to do."""


class FieldplanError(Exception):
    r"""Something a person can put right, said in one line per problem.

    Parameters
    ----------
    *problems : str
        One complete sentence each: the file, row or key; the value found; the rule; the remedy.

    Examples
    --------
    >>> str(FieldplanError("labs.csv row 3: 'lead' is empty.", "labs.csv row 9: twice."))
    "labs.csv row 3: 'lead' is empty.\nlabs.csv row 9: twice."
    """

    exit_code = 1

    def __init__(self, *problems: str) -> None:
        super().__init__("\n".join(problems))
        self.problems: tuple[str, ...] = problems


class CampaignError(FieldplanError):
    """The campaign file is typed wrong."""

    exit_code = 2


class FrameError(FieldplanError):
    """The boundary, strata, exclusions or list cannot serve as a frame."""


class LabError(FieldplanError):
    """A pilot, laboratory or field file cannot be read or matched."""


class DesignError(FieldplanError):
    """The design asked for cannot be sized or drawn."""


class RecordError(FieldplanError):
    """A packet or its record is missing, damaged or already issued."""
