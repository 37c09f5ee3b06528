"""Makes look_table.json: what general-purpose readers say about every raster of the reader-stress data.

    python -m venv V && V/bin/pip install rasterio tifffile imagecodecs numpy pillow
    V/bin/python tests/field/make_look_table.py FIELD_DATA > tests/field/look_table.json

Figures only, no pixels. The rules that turn a file into numbers are those of the program's reader, restated
here in numpy: opacity is no band, a palette is three bands, scale and offset apply, a pixel is missing where it is no
data, not finite, of 3.39e38 or more, fully transparent or masked. Pixels come from rasterio; where tifffile can
read the same file its samples are compared and a difference is an error.
"""

import json
import sys
import warnings
import zlib
from pathlib import Path

import numpy as np
import rasterio
import tifffile

warnings.filterwarnings("ignore")
LOSSY = {"jpeg", "webp"}


def sample_name(path, dtype):
    with tifffile.TiffFile(path) as t:
        page = t.pages[0]
        if page.dtype is not None and page.dtype.kind == "f" and page.dtype.itemsize == 2:
            return "f16"
    d = np.dtype(dtype)
    return {"u": "u", "i": "i", "f": "f"}[d.kind] + str(8 * d.itemsize)


def band_figures(values, valid, lossy):
    """CRC-32 of the little-endian f32 values (0 where missing) and of the mask bytes, and sums with their weights."""
    out = np.where(valid, values, 0).astype("<f4")
    wide = out.astype("f8")
    row, col = np.indices(out.shape)
    figures = {
        "valid": int(valid.sum()),
        "mask_crc32": zlib.crc32(valid.astype("u1").tobytes()),
        "sum": float(wide.sum()),
        "sum_col": float((wide * (col + 1)).sum()),
        "sum_row": float((wide * (row + 1)).sum()),
    }
    if not lossy:
        figures["crc32"] = zlib.crc32(out.tobytes())
    return figures


def compare(path, index, samples):
    """The same samples by the second reader, where it reads the file."""
    try:
        with tifffile.TiffFile(path) as t:
            page = t.pages[0]
            if page.photometric == tifffile.PHOTOMETRIC.YCBCR:
                return "rasterio"  # chroma is spread differently by every reader
            other = page.asarray()
            if page.samplesperpixel > 1:
                other = other[index] if page.planarconfig == 2 else other[..., index]
    except Exception:
        return "rasterio"
    if other.dtype == bool:
        other = other.astype("u1")
    same = np.array_equal(other.astype(samples.dtype), samples, equal_nan=samples.dtype.kind == "f")
    if not same and np.abs(other.astype("f8") - samples.astype("f8")).max() > 3:
        raise SystemExit(f"{path}: rasterio and tifffile disagree in band {index + 1}")
    return "rasterio and tifffile"


def geographic(wkt):
    """The geographic system inside a projected one, by counting brackets."""
    start = wkt.index("GEOGCS[")
    depth = 0
    for end in range(start, len(wkt)):
        depth += {"[": 1, "]": -1}.get(wkt[end], 0)
        if wkt[end] == "]" and depth == 0:
            return wkt[start : end + 1]
    raise ValueError("unbalanced brackets")


def place(ds):
    t = ds.transform
    out = {"affine": [t.a, t.b, t.c, t.d, t.e, t.f]}
    if ds.crs is None:
        return out | {"projection": None}
    try:
        known = ds.crs.to_dict()
    except Exception:
        known = {}
    wkt = ds.crs.to_wkt()
    sphere = wkt.split("SPHEROID[", 1)[1].split("]", 1)[0].split(",") if "SPHEROID[" in wkt else None
    middle = ds.xy(ds.height / 2 - 0.5, ds.width / 2 - 0.5)
    out |= {"projection": known.get("proj") or ("longlat" if ds.crs.is_geographic else "projected"), "epsg": ds.crs.to_epsg()}
    if sphere:
        a, inv = float(sphere[1]), float(sphere[2])
        out |= {"equatorial_m": a, "polar_m": a if inv == 0 else a * (1 - 1 / inv)}
    try:
        from rasterio.crs import CRS
        from rasterio.warp import transform

        lon, lat = transform(ds.crs, CRS.from_wkt(geographic(wkt)), [middle[0]], [middle[1]])
        out["middle_lonlat"] = [lon[0], lat[0]]
    except Exception as problem:
        out["middle_lonlat"] = None
        print(f"{ds.name}: no middle: {problem}", file=sys.stderr)
    return out


def describe(path):
    with rasterio.open(path) as ds:
        kinds = [c.name for c in ds.colorinterp]
        lossy = (ds.profile.get("compress") or "").lower() in LOSSY
        sample = sample_name(path, ds.dtypes[0])
        data = [i for i in range(ds.count) if kinds[i] != "alpha"]
        shared = np.ones((ds.height, ds.width), bool)
        if "alpha" in kinds:
            shared &= ds.read(kinds.index("alpha") + 1) != 0
        elif rasterio.enums.MaskFlags.per_dataset in ds.mask_flag_enums[0]:
            shared &= ds.read_masks(1) != 0
        bands, readers = [], set()
        for i in data:
            raw = ds.read(i + 1)
            readers.add(compare(path, i, raw))
            valid = shared.copy()
            if raw.dtype.kind == "f":
                valid &= np.abs(raw) < 3.39e38
            if ds.nodata is not None and not np.isnan(ds.nodata):
                valid &= raw.astype("f8") != np.float64(raw.dtype.type(ds.nodata))
            if kinds[i] == "palette":
                colours = ds.colormap(i + 1)
                for channel in range(3):
                    table = np.array([colours[k][channel] for k in range(256)])
                    bands.append(band_figures(table[raw], valid, lossy))
                continue
            values = raw.astype("f8") * ds.scales[i] + ds.offsets[i]
            bands.append(band_figures(values, valid, lossy))
        nodata = ds.nodata
        levels = [[ds.width, ds.height]]
        for k in range(len(ds.overviews(1))):
            with rasterio.open(path, overview_level=k) as coarse:
                levels.append([coarse.width, coarse.height])
        return {
            "width": ds.width, "height": ds.height, "sample": sample, "lossy": lossy, "bands": bands,
            "nodata": "nan" if nodata is not None and np.isnan(nodata) else nodata,
            "levels": levels, "read_by": sorted(readers), "place": place(ds),
        }


def main(root):
    table = {}
    for path in sorted(Path(root, "reader-stress").glob("*/*.tif*")):
        if path.name.endswith(".ovr"):
            continue
        key = f"{path.parent.name}/{path.name}"
        try:
            table[key] = describe(path)
        except SystemExit:
            raise
        except Exception as problem:
            table[key] = {"unreadable": f"{type(problem).__name__}: {problem}".replace(str(root), "")}
    json.dump(table, sys.stdout, indent=1, allow_nan=False)
    print()


main(sys.argv[1])
