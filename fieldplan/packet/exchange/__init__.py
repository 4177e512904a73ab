"""Point files: GPX, KML, CSV, GeoPackage, GeoJSON, workbook; each read back by another parser."""
