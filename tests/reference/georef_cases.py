"""Makes georef_cases.json: the tags that general-purpose writers put into a GeoTIFF for many reference
systems, and what pyproj says the longitude and latitude of some pixels are.

    python georef_cases.py > georef_cases.json        (rasterio, pyproj, tifffile)
"""

import json
import sys
import warnings

import numpy
import pyproj
import rasterio
import tifffile
from rasterio.io import MemoryFile
from rasterio.transform import Affine

warnings.filterwarnings("ignore")
TAGS = {33550: "pixel_scale", 33922: "tie_points", 34264: "transformation", 34735: "key_directory",
        34736: "double_params", 34737: "ascii_params"}
WIDTH, HEIGHT = 120, 80
PIXELS = [(0.0, 0.0), (60.0, 40.0), (119.5, 3.25), (17.5, 71.0)]
SMALL = "+R=1420000 +no_defs"
OVAL = "+a=3396190 +b=3376200 +no_defs"

# (reference system, a position inside its domain, pixel size in map units)
SYSTEMS = [
    ("EPSG:32633", (17, 52), 30), ("EPSG:32705", (-150, -20), 10), ("EPSG:3857", (30, 55), 5),
    ("EPSG:3413", (-40, 75), 100), ("EPSG:3031", (45, -80), 100), ("EPSG:27700", (-2.5, 53), 5),
    ("EPSG:2154", (4, 46), 5), ("EPSG:3035", (12, 50), 100), ("EPSG:5070", (-100, 40), 30),
    ("EPSG:2263", (-74, 40.7), 3), ("EPSG:26913", (-104, 39), 1), ("EPSG:2193", (174, -41), 15),
    ("EPSG:28992", (5.5, 52), 5), ("EPSG:2056", (8, 47), 5), ("EPSG:3395", (20, 60), 50),
    ("EPSG:6933", (20, -25), 1000), ("EPSG:21897", (-74, 4.5), 60), ("EPSG:31467", (9.5, 50), 10),
    ("EPSG:4326", (-84, 36), 0.001), ("EPSG:4269", (-84, 36), 0.001), ("EPSG:4807", (2, 46), 0.01),
    (f"+proj=eqc +lat_ts=0 +lon_0=0 {SMALL}", (25, 60), 200),
    (f"+proj=eqc +lat_ts=40 +lon_0=180 {SMALL}", (170, 40), 200),
    (f"+proj=sinu +lon_0=40 {SMALL}", (70, 50), 200), (f"+proj=merc +lon_0=10 +lat_ts=30 {OVAL}", (20, 35), 100),
    (f"+proj=merc +lon_0=10 +k=0.9 {OVAL}", (20, 35), 100),
    (f"+proj=stere +lat_0=90 +lon_0=20 {SMALL}", (50, 80), 100),
    (f"+proj=stere +lat_0=-90 +lat_ts=-71 +lon_0=20 {OVAL}", (50, -80), 100),
    (f"+proj=stere +lat_0=30 +lon_0=20 {SMALL}", (25, 28), 100),
    (f"+proj=laea +lat_0=-30 +lon_0=20 {OVAL}", (25, -28), 100),
    (f"+proj=lcc +lat_1=20 +lat_2=50 +lat_0=35 +lon_0=-60 +x_0=1000 +y_0=2000 {OVAL}", (-55, 30), 100),
    (f"+proj=lcc +lat_1=35 +lat_0=35 +lon_0=-60 +k_0=0.999 {OVAL}", (-55, 30), 100),
    (f"+proj=aea +lat_1=-20 +lat_2=-50 +lat_0=-35 +lon_0=-60 {SMALL}", (-55, -30), 100),
    (f"+proj=ortho +lat_0=20 +lon_0=100 {SMALL}", (110, 40), 100),
    (f"+proj=tmerc +lat_0=5 +lon_0=100 +k=0.9996 +x_0=500000 +y_0=7 {OVAL}", (104, 40), 100),
    (f"+proj=tmerc +lat_0=5 +lon_0=100 {SMALL}", (104, 40), 100),
    (f"+proj=cea +lat_ts=30 +lon_0=100 {SMALL}", (104, 40), 100),
    (f"+proj=aeqd +lat_0=30 +lon_0=100 {SMALL}", (104, 40), 100),
    (f"+proj=eqdc +lat_1=20 +lat_2=50 +lat_0=30 +lon_0=100 {OVAL}", (104, 40), 100),
    (f"+proj=cass +lat_0=30 +lon_0=100 {OVAL}", (101, 31), 20), (f"+proj=gnom +lat_0=30 +lon_0=100 {SMALL}", (104, 40), 100),
    (f"+proj=mill +lon_0=100 {SMALL}", (104, 40), 100), (f"+proj=poly +lat_0=30 +lon_0=100 {OVAL}", (104, 40), 100),
    (f"+proj=omerc +lat_0=30 +lonc=100 +alpha=35 +gamma=35 +k=0.9999 {OVAL}", (102, 31), 50),
    (f"+proj=longlat {SMALL}", (200, 30), 0.01), (f"+proj=longlat {OVAL}", (-100, 30), 0.01),
    (f"+proj=tmerc +lat_0=5 +lon_0=100 +x_0=300000 +units=km {OVAL}", (104, 40), 0.1),
    (f"+proj=laea +lat_0=40 +lon_0=20 +units=us-ft {OVAL}", (22, 41), 300),
    (f"+proj=laea +lat_0=40 +lon_0=20 +x_0=20000 +to_meter=2.5 {OVAL}", (22, 41), 30),
    (f"+proj=tmerc +lon_0=3 +pm=2.5 {OVAL}", (6, 40), 20), ("EPSG:27572", (3, 47), 10),
    (f"+proj=longlat +pm=paris {OVAL}", (6, 40), 0.01),
]
# Linear parts: north-up, south-up, mirrored, rotated and sheared.
LINEAR = [(1, 0, 0, -1), (1, 0, 0, 1), (-1, 0, 0, -1), (0.6, 0.9, 0.7, -0.5)]


def case(system, at, size, linear, point):
    crs = pyproj.CRS(system)
    base = crs.geodetic_crs
    forward = pyproj.Transformer.from_crs(base, crs, always_xy=True)
    back = pyproj.Transformer.from_crs(crs, base, always_xy=True)
    meridian = base.prime_meridian.longitude * base.prime_meridian.unit_conversion_factor * 180 / numpy.pi
    unit = base.axis_info[0].unit_conversion_factor * 180 / numpy.pi  # degrees per unit of the base
    x, y = at if crs.is_geographic else forward.transform((at[0] - meridian) / unit, at[1] / unit)
    a, b, d, e = (size * part for part in linear)
    affine = Affine(a, b, x - a * 60 - b * 40, d, e, y - d * 60 - e * 40)
    profile = dict(driver="GTiff", width=WIDTH, height=HEIGHT, count=1, dtype="uint8", crs=crs.to_wkt(), transform=affine)
    with MemoryFile() as memory:
        with memory.open(**profile) as raster:
            raster.write(numpy.zeros((1, HEIGHT, WIDTH), "uint8"))
            if point:
                raster.update_tags(AREA_OR_POINT="Point")
        page = tifffile.TiffFile(memory).pages[0]
        tags = {}
        for code, name in TAGS.items():
            if code in page.tags:
                value = page.tags[code].value
                tags[name] = value if isinstance(value, str) else list(value)
        with memory.open() as raster:
            read = raster.transform
    points = []
    for col, row in PIXELS:
        mx, my = read * (col, row)
        lon, lat = (mx, my) if crs.is_geographic else back.transform(mx, my)
        points.append([col, row, lon * unit + meridian, lat * unit])
    ellipsoid = crs.ellipsoid
    return {"system": system, "tags": tags, "axes": [ellipsoid.semi_major_metre, ellipsoid.semi_minor_metre], "points": points}


cases = []
for index, (system, at, size) in enumerate(SYSTEMS):
    # Each system north-up; the other transforms spread over them.
    for linear, point in {(LINEAR[0], False), (LINEAR[index % 4], index % 3 == 0)}:
        try:
            cases.append(case(system, at, size, linear, point))
        except Exception as error:
            print(system, error, file=sys.stderr)
cases.sort(key=lambda c: (c["system"], str(c["tags"])))
print("[")
print(",\n".join(json.dumps(c) for c in cases))
print("]")
print(f"pyproj {pyproj.__version__}, PROJ {pyproj.proj_version_str}, rasterio {rasterio.__version__}", file=sys.stderr)
