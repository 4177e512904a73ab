"""How the plan sheet and the working are divided, and how each refers to the other."""

SHEET = (
    "What is asked",
    "What the plan will and will not tell",
    "For what the mean speaks",
    "How uneven the site is",
    "How many",
    "How the locations are drawn",
    "When a location cannot be sampled as planned",
    "Rules on record",
    "Cautions and hold points",
    "Sign-off",
)
"""Sections of ``office/plan_sheet``: what decides, and what has to be known before."""

WORKING = (
    "The spread in full",
    "The number in full",
    "Beside the number",
    "The population in parts",
    "Locations",
    "Samples and quality control",
    "In the field",
    "For the report",
    "What this plan was made from",
    "Words used",
    "The drawing procedure, line by line",
)
"""Sections of ``office/working``: what stands behind the plan sheet."""


def on_sheet(title: str) -> str:
    """Refer to a section of the plan sheet.

    Examples
    --------
    >>> on_sheet("How many")
    'the plan sheet, section 5'
    """
    return f"the plan sheet, section {1 + SHEET.index(title)}"


def in_working(title: str) -> str:
    """Refer to a section of the working.

    Examples
    --------
    >>> in_working("The number in full")
    'The working, section 2'
    """
    return f"The working, section {1 + WORKING.index(title)}"
