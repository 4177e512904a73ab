"""Point files: GPX, KML, CSV, GeoPackage, GeoJSON, workbook; each read back by another parser."""

from pathlib import Path

from fieldplan.base.files import write_atomically
from fieldplan.packet.exchange.geojson import write_geojson
from fieldplan.packet.exchange.geopackage import write_geopackage
from fieldplan.packet.exchange.gpx import write_gpx
from fieldplan.packet.exchange.kml import write_kml
from fieldplan.packet.exchange.points_csv import write_points_csv, write_samples_key
from fieldplan.packet.exchange.reading import SAMPLES_KEY, read_back
from fieldplan.packet.exchange.workbook import write_workbook
from fieldplan.plan.model import Plan

__all__ = ["read_back", "write_point_files"]


def write_point_files(plan: Plan, crew: Path, office: Path) -> tuple[Path, ...]:
    """Write all point files of a plan and read every one of them back.

    Parameters
    ----------
    plan : Plan
    crew : Path
        Folder for CSV, GPX and KML; nothing in them tells a duplicate from its parent.
    office : Path
        Folder for GeoPackage, GeoJSON, workbook and the key to samples.

    Returns
    -------
    tuple of Path
        The files, crew's first.

    Raises
    ------
    RecordError
        A file does not read back within 0.2 m; the files are left to the caller to discard.
    """
    name = plan.revision_name
    contents = {
        crew / f"{name}-points.csv": write_points_csv,
        crew / f"{name}-points.gpx": write_gpx,
        crew / f"{name}-points.kml": write_kml,
        office / f"{name}-locations.gpkg": write_geopackage,
        office / f"{name}-locations.geojson": write_geojson,
        office / f"{name}-locations.xlsx": write_workbook,
        office / SAMPLES_KEY: write_samples_key,
    }
    paths = tuple(write_atomically(path, write(plan)) for path, write in contents.items())
    read_back(plan, paths)
    return paths
