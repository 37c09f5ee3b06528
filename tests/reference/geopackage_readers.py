"""Opens the GeoPackage that `write_points_of_all_systems` wrote with general-purpose readers and compares
positions.

    cargo test --test reference write_points_of_all_systems -- --ignored --nocapture
    python geopackage_readers.py systems.gpkg        (geopandas, pyogrio, pyproj)
"""

import sqlite3
import sys

import numpy
import pyogrio
import pyproj

path = sys.argv[1]
described = dict(sqlite3.connect(path).execute("SELECT table_name, description FROM gpkg_contents"))
worst, failed = 0.0, 0
for name, kind in pyogrio.list_layers(path):
    frame = pyogrio.read_dataframe(path, layer=name)
    crs = frame.crs
    if crs is None:
        print(name, described[name], "NO REFERENCE SYSTEM")
        failed += 1
        continue
    base = crs.geodetic_crs
    back = pyproj.Transformer.from_crs(crs, base, always_xy=True)
    unit = base.axis_info[0].unit_conversion_factor * 180 / numpy.pi
    meridian = base.prime_meridian.longitude * base.prime_meridian.unit_conversion_factor * 180 / numpy.pi
    x, y = frame.geometry.x.to_numpy(), frame.geometry.y.to_numpy()
    lon, lat = (x, y) if crs.is_geographic else back.transform(x, y)
    lon, lat = lon * unit + meridian, lat * unit
    off = numpy.maximum(abs((lon - frame.lon_deg + 540) % 360 - 180), abs(lat - frame.lat_deg)).max()
    worst = max(worst, off)
    if not off < 1e-8:
        print(name, described[name], f"off by {off:.2e} degrees\n   ", crs.to_wkt()[:3000])
        failed += 1
print(f"{len(described)} layers, {failed} failed, worst {worst:.2e} degrees; pyogrio {pyogrio.__version__}")
