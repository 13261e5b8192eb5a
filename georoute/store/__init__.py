"""The plan file: a GeoPackage that opens in any GIS."""
