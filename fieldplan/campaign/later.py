"""What this version cannot do yet, refused by its name rather than as an unknown key."""

_LATER_VALUES: dict[tuple[str, str], dict[str, str]] = {
    ("frame", "kind"): {
        "volume": "frames of volumes such as stockpiles and water bodies",
        "time": "frames of time such as days of discharge",
    },
    ("design", "layout"): {
        "ranked-set": "ranked set sampling",
        "transect": "transects",
        "cluster": "cluster layouts",
        "adaptive-cluster": "adaptive cluster layouts",
        "two-start-grid": "grids with two random starts",
        "composite": "composite samples",
        "incremental": "incremental samples",
    },
}

_LATER_KEYS: dict[str, str] = {
    "composite": "composite samples",
    "composites": "composite samples",
    "crew": "visit schedules of several crews",
    "crews": "visit schedules of several crews",
    "schedule": "visit schedules",
    "route": "routes",
}

MANY = {
    "frame": "several frames in one campaign",
    "design": "several designs in one campaign",
    "event": "several rounds of field work in one campaign",
}
"""Tables of which this version takes one."""


def later_value(table: str, key: str, value: object) -> str | None:
    """Name what a value stands for that is not done yet; None when it is not known either.

    Examples
    --------
    >>> later_value("frame", "kind", "time"), later_value("frame", "kind", "site")
    ('frames of time such as days of discharge', None)
    """
    if not isinstance(value, str):
        return None
    known = _LATER_VALUES.get((table, key), {})
    return known.get(value.strip().lower().replace(" ", "-").replace("_", "-"))


def later_key(key: str) -> str | None:
    """Name what a key stands for that is not done yet; None when it is not known either.

    Examples
    --------
    >>> later_key("composites"), later_key("titel")
    ('composite samples', None)
    """
    return _LATER_KEYS.get(key.lower())
