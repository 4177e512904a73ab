"""From counts to named locations with degrees, probabilities and weights."""

from collections import Counter
from collections.abc import Mapping, Sequence

import shapely

from fieldplan.base.draws import VERSION
from fieldplan.base.errors import DesignError
from fieldplan.campaign.model import Campaign
from fieldplan.design.layouts import layout_of
from fieldplan.design.model import (
    DrawnPlace,
    DrawnPlaces,
    Location,
    Locations,
    StratumCount,
)
from fieldplan.design.names import Naming, naming, own_names, plain_form
from fieldplan.frame.model import Frame, TargetedPlace


def locate(campaign: Campaign, frame: Frame, counts: Sequence[StratumCount]) -> Locations:
    """Draw, name and weigh the locations of a campaign's design.

    Parameters
    ----------
    campaign : Campaign
        Layout, minimum spacing, seed and prefix are taken from it.
    frame : Frame
    counts : sequence of StratumCount
        One for each stratum of the frame.

    Returns
    -------
    Locations
        Random places by stratum, then alternates, then targeted places.

    Raises
    ------
    DesignError
        The layout does not suit the frame, the places do not fit, two would share an id, or the
        design takes composites.
    """
    _refuse_composites(campaign)
    if campaign.draw.version != VERSION:
        message = (
            f"the campaign was drawn with procedure {campaign.draw.version}; this release has "
            f"procedure {VERSION}."
        )
        raise DesignError(message)
    design = campaign.design[0]
    drawn = layout_of(design).draw(
        frame,
        counts,
        seed=campaign.draw.seed,
        design=design.id,
        minimum_spacing_m=design.minimum_spacing_m,
        exact_count=design.exact_count,
    )
    places = _named_places(campaign, frame, counts, drawn)
    _refuse_shared_ids(places)
    notes = drawn.notes + _close_pairs(drawn.places, design.minimum_spacing_m)
    return Locations(
        layout=design.layout,
        seed=campaign.draw.seed,
        version=campaign.draw.version,
        places=places,
        asked=sum(count.planned for count in counts),
        realised=drawn.realised,
        notes=notes,
    )


def _refuse_composites(campaign: Campaign) -> None:
    """Refuse what no map and no form can show yet: each composite drawn as one location.

    Increments drawn as locations would come back as results, and they are none.
    """
    design = campaign.design[0]
    if design.takes_composites:
        message = (
            f"design.increments = {design.increments}: locations of increments, and forms for "
            "composites, are not done yet in this version. 'fieldplan size' says how many "
            "composites of how many increments; take increments out to draw single samples."
        )
        raise DesignError(message)


def _named_places(
    campaign: Campaign, frame: Frame, counts: Sequence[StratumCount], drawn: DrawnPlaces
) -> tuple[Location, ...]:
    names, own = _names(campaign, frame, drawn)
    planned = {count.stratum: count.planned for count in counts}
    in_cell = Counter((p.stratum, p.cell) for p in drawn.places if p.location_class == "random")
    degrees = _degrees(frame, drawn.places)
    located = [
        Location(
            location_id=place.unit_id or names.location_id(place.stratum, place.list_order),
            short_name=own.get(place.unit_id) or names.short_name(place.stratum, place.list_order),
            location_class=place.location_class,
            stratum=place.stratum,
            easting=round(place.easting, 2),
            northing=round(place.northing, 2),
            latitude=latitude,
            longitude=longitude,
            list_order=place.list_order,
            inclusion_probability=_density(frame, place, planned[place.stratum], in_cell),
            weight=_weight(frame, place, in_cell),
            alternate_for="" if place.location_class == "random" else f"any in {place.stratum}",
            cell=place.cell,
            cell_share=place.cell_share,
            cell_centre=place.cell_centre,
            branch=place.branch,
            along_m=place.along_m,
            start=place.start,
        )
        for place, (latitude, longitude) in zip(drawn.places, degrees, strict=True)
    ]
    located.sort(key=lambda place: place.location_class == "alternate")
    located += [
        _targeted(frame, place, own.get(place.place_id) or names.targeted_name(number))
        for number, place in enumerate(frame.targeted, 1)
    ]
    return tuple(located)


def _names(campaign: Campaign, frame: Frame, drawn: DrawnPlaces) -> tuple[Naming, dict[str, str]]:
    """Say how places are named, and which ids serve as names of their own."""
    longest = max([p.list_order for p in drawn.places] + [len(frame.targeted)])
    units = [unit.unit_id for stratum in frame.strata for unit in stratum.units]
    ids = units + [place.place_id for place in frame.targeted]
    strata = [stratum.name for stratum in frame.strata]
    names = naming(campaign.prefix, strata, longest, given=ids if units else ())
    return names, {own: name for own, name in own_names(ids).items() if not names.looks_made(name)}


def _density(
    frame: Frame, place: DrawnPlace, planned: int, in_cell: Mapping[tuple[str, int], int]
) -> float:
    measure = frame.stratum(place.stratum).measure
    if not place.cell:
        return planned / measure
    return in_cell[place.stratum, place.cell] / (measure * place.cell_share)


def _weight(frame: Frame, place: DrawnPlace, in_cell: Mapping[tuple[str, int], int]) -> float:
    if place.location_class != "random":
        return 0.0
    share = place.cell_share if place.cell else 1.0
    return frame.stratum(place.stratum).weight * share / in_cell[place.stratum, place.cell]


def _degrees(frame: Frame, places: Sequence[DrawnPlace]) -> list[tuple[float, float]]:
    if frame.kind == "list":
        units = {(u.stratum, u.unit_id): u for s in frame.strata for u in s.units}
        chosen = [units[place.stratum, place.unit_id] for place in places]
        return [(round(u.latitude, 7), round(u.longitude, 7)) for u in chosen]
    from fieldplan.frame.projection import to_degrees

    latitudes, longitudes = to_degrees(
        frame.projection,
        [round(place.easting, 2) for place in places],
        [round(place.northing, 2) for place in places],
    )
    return [
        (round(float(latitude), 7), round(float(longitude), 7))
        for latitude, longitude in zip(latitudes, longitudes, strict=True)
    ]


def _targeted(frame: Frame, place: TargetedPlace, short_name: str) -> Location:
    return Location(
        location_id=place.place_id,
        short_name=short_name,
        location_class="targeted",
        stratum=_stratum_at(frame, place),
        easting=round(place.easting, 2),
        northing=round(place.northing, 2),
        latitude=round(place.latitude, 7),
        longitude=round(place.longitude, 7),
        list_order=0,
        inclusion_probability=0.0,
        weight=0.0,
    )


def _stratum_at(frame: Frame, place: TargetedPlace) -> str:
    """Name the stratum around a targeted place; empty where it lies outside them all."""
    point = shapely.Point(place.easting, place.northing)
    for stratum in frame.strata:
        if stratum.geometry is not None and stratum.geometry.covers(point):
            return stratum.name
    return ""


def _refuse_shared_ids(places: Sequence[Location]) -> None:
    """Refuse two places of one id, and a place whose id reads like the short name of another."""
    seen: dict[str, Location] = {}
    named = {place.short_name: place for place in places}
    problems = []
    for place in places:
        other = seen.setdefault(place.location_id.casefold(), place)
        alike = named.get(plain_form(place.location_id), place)
        if other is not place:
            problems.append(
                f"{other.location_class} location '{other.location_id}' and "
                f"{place.location_class} location '{place.location_id}' share an id; rename the "
                "one that you named."
            )
        elif alike is not place:
            problems.append(
                f"{place.location_class} location '{place.location_id}' reads like the short name "
                f"{alike.short_name} of {alike.location_class} location '{alike.location_id}'; "
                "rename the one that you named."
            )
    if problems:
        raise DesignError(*problems)


def _close_pairs(places: Sequence[DrawnPlace], spacing_m: float) -> tuple[str, ...]:
    """Say how close places of different strata stand, where a minimum spacing was asked for."""
    if spacing_m == 0 or len({place.stratum for place in places}) < 2:
        return ()
    points = [shapely.Point(place.easting, place.northing) for place in places]
    pairs = shapely.STRtree(points).query(points, predicate="dwithin", distance=spacing_m)
    apart = [
        shapely.distance(points[i], points[j])
        for i, j in pairs.T.tolist()
        if places[i].stratum < places[j].stratum
    ]
    closer = [float(distance) for distance in apart if distance < spacing_m]
    if not closer:
        return ()
    return (
        f"The minimum spacing of {spacing_m:g} m holds within strata; {len(closer)} pairs of "
        f"places on either side of a stratum line stand closer, the closest {min(closer):.2f} m.",
    )
