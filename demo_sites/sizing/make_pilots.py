"""Makes the invented pilots that docs/sizing shows: ``python demo_sites/sizing/make_pilots.py``.

A survey of 40 places drawn at random on one field, from a normal field of practical range 120 m
with a fifth of its variance without structure; and 36 monthly visits to a weir, with a
correlation of 0.45 between months. Seeds are fixed, so the files come out the same.
"""

import csv
import json
from datetime import date, timedelta
from pathlib import Path

import numpy as np
import pyproj
import shapely

HERE = Path(__file__).parent
OUTLINE = [(0, 0), (180, -20), (310, 30), (330, 160), (240, 230), (90, 215), (-20, 120), (0, 0)]
PLANE = pyproj.Transformer.from_crs(
    "+proj=laea +lat_0=54.61 +lon_0=-3.12 +datum=WGS84 +units=m", "EPSG:4326", always_xy=True
)


def degrees(east: float, north: float) -> tuple[float, float]:
    """Turn metres from the corner into longitude and latitude."""
    longitude, latitude = PLANE.transform(east, north)
    return round(longitude, 7), round(latitude, 7)


def survey() -> None:
    """Write boundary and pilot of the survey."""
    random = np.random.default_rng(20261130)
    site = shapely.Polygon(OUTLINE)
    places: list[tuple[float, float]] = []
    while len(places) < 40:
        east, north = random.uniform(-20, 330), random.uniform(-20, 230)
        if shapely.contains_xy(site, east, north):
            places.append((east, north))
    at = np.array(places)
    apart = np.hypot(*(at[:, None, :] - at[None, :, :]).transpose(2, 0, 1))
    root = np.linalg.cholesky(0.8 * np.exp(-3 * apart / 120) + 0.2 * np.eye(len(at)))
    values = 84 + 24 * root @ random.standard_normal(len(at))
    ring = [degrees(*corner) for corner in OUTLINE]
    outline = {"type": "Polygon", "coordinates": [ring]}
    feature = {"type": "Feature", "properties": {"name": "Stell Howe"}, "geometry": outline}
    text = json.dumps({"type": "FeatureCollection", "features": [feature]}, indent=1)
    (HERE / "survey" / "boundary.geojson").write_text(text + "\n", encoding="utf-8")
    rows = []
    for number, (place, value) in enumerate(zip(places, values, strict=True), start=1):
        longitude, latitude = degrees(*place)
        rows.append([f"S{number:02d}", "lead", f"{value:.1f}", "mg/kg", latitude, longitude])
    header = ["location_id", "analyte", "as_reported", "unit", "latitude", "longitude"]
    write("survey", header, rows)


def weir() -> None:
    """Write the visits of three years to one weir."""
    random = np.random.default_rng(20261202)
    level, rows = random.standard_normal(), []
    for month in range(36):
        day = date(2022, 1, 12) + timedelta(days=round(30.44 * month))
        rows.append(["weir", "nitrate", f"{3.4 + 0.9 * level:.2f}", "mg/L", day.isoformat()])
        level = 0.45 * level + np.sqrt(1 - 0.45**2) * random.standard_normal()
    write("weir", ["location_id", "analyte", "as_reported", "unit", "collected_on"], rows)


def write(folder: str, header: list[str], rows: list[list[object]]) -> None:
    """Write a pilot file."""
    with (HERE / folder / "pilot.csv").open("w", encoding="utf-8", newline="") as stream:
        csv.writer(stream, lineterminator="\n").writerows([header, *rows])


if __name__ == "__main__":
    survey()
    weir()
