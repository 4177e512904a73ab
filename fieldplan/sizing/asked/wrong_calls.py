"""Where a call is wrong: two wings that fall away from a region in which neither call counts."""

from dataclasses import dataclass

from fieldplan.sizing.model import Picture, Series


@dataclass(frozen=True)
class Wing:
    """How often the call is wrong on one side of the gray region.

    Parameters
    ----------
    name : str
        Of the end of the gray region where the wing begins.
    chance_name : str
        Of the chance that is allowed there.
    chance : float
        The same, in per cent.
    words : str
        What goes wrong.
    x, y : tuple of float
        From that end outwards; per cent of campaigns.
    wider : tuple of float
        The same where sigma is larger; may be empty.
    """

    name: str
    chance_name: str
    chance: float
    words: str
    x: tuple[float, ...]
    y: tuple[float, ...]
    wider: tuple[float, ...] = ()


def wrong_calls(
    wings: tuple[Wing, Wing], *, caption: str, alternative: str, x_label: str, y_label: str
) -> Picture:
    """Put two wings into one picture.

    Parameters
    ----------
    wings : tuple of Wing
    caption, alternative, x_label, y_label : str

    Returns
    -------
    Picture
        ``marks`` are the ends of the gray region, ``levels`` the chances allowed at them, in the
        order of the wings.
    """
    series = []
    for wing in wings:
        series.append(Series(wing.words, wing.x, wing.y))
        if wing.wider:
            series.append(Series("sigma larger", wing.x, wing.wider, "dashes"))
    return Picture(
        kind="wrong-calls",
        caption=caption,
        alternative=alternative,
        x_label=x_label,
        y_label=y_label,
        series=tuple(series),
        marks=tuple((wing.name, wing.x[0]) for wing in wings),
        levels=tuple((wing.chance_name, wing.chance) for wing in wings),
    )
