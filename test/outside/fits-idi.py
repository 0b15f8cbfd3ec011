"""FITS-IDI as Astropy reads it, and files of odd order that Astropy makes.

`sample`: the sample input cell by cell, as digests (SHA-256 of little-endian arrays in the order row, sub-band, channel,
polarization) with some cells in plain sight; its Greenwich sidereal time against ERFA's IAU 1982 mean time; and u, v, w
recomputed from its tables by vector algebra (axes w = s, u = pole x s, v = w x u), worst difference in millimetres.
`made`: small files with their bytes, and every value as Astropy reads it back. Prints JSON.
"""
import base64
import hashlib
import io
import json
import os

import erfa
import numpy as np
from astropy.io import fits
from astropy.time import Time

C = 299792458.0
MJD = 2400000.5
SAMPLES = os.path.join(os.path.dirname(os.path.abspath(__file__)), "..", "..", "sample-inputs")
ORDER = ("BAND", "FREQ", "STOKES", "COMPLEX")


def plain(values):
    return [float(v) if np.isfinite(v) else ("NaN" if np.isnan(v) else "Infinity") for v in np.ravel(values)]


def canonical(hdu, column):
    """The matrix as (row, band, channel, product, complex), whatever the order of its axes, by CTYPEm."""
    header = hdu.header
    lengths = [header[f"MAXIS{i + 1}"] for i in range(header["MAXIS"])]
    types = [header[f"CTYPE{i + 1}"] for i in range(header["MAXIS"])]
    flat = np.asarray(hdu.data[column]).reshape(len(hdu.data), -1)
    cube = flat.reshape([len(hdu.data)] + lengths[::-1])
    # NumPy's last axis is the fastest, FITS's first.
    where = {name: len(lengths) - i for i, name in enumerate(types)}
    keep = [where[name] for name in ORDER]
    rest = [axis for axis in range(1, cube.ndim) if axis not in keep]
    return cube.transpose([0] + keep + rest).reshape([len(hdu.data)] + [cube.shape[axis] for axis in keep])


def times(data):
    return (np.asarray(data["DATE"], dtype=np.float64) - MJD) + np.asarray(data["TIME"], dtype=np.float64)


def weights(hdu, shape):
    """By row, band, channel, product, from column WEIGHT of product and band, of band, or of the row."""
    rows, bands, channels, products = shape
    column = np.asarray(hdu.data["WEIGHT"], dtype=np.float32).reshape(rows, -1)
    if column.shape[1] == bands * products:
        by = column.reshape(rows, bands, 1, products)
    else:
        by = column.reshape(rows, -1, 1, 1)
    return np.broadcast_to(by, shape)


def digest(values, kind):
    return hashlib.sha256(np.ascontiguousarray(values, dtype=kind).tobytes()).hexdigest()


def worst_uvw(hdus):
    data, geometry = hdus["UV_DATA"].data, hdus["ARRAY_GEOMETRY"]
    numbers = dict(zip((str(n).strip() for n in hdus["ANTENNA"].data["ANNAME"]), hdus["ANTENNA"].data["ANTENNA_NO"]))
    place = {int(numbers[str(n).strip()]): np.array(xyz, dtype=float) for n, xyz in zip(geometry.data["ANNAME"], geometry.data["STABXYZ"])}
    source = hdus["SOURCE"].data
    ra, dec = np.radians(float(source["RAEPO"][0])), np.radians(float(source["DECEPO"][0]))
    reference = Time(geometry.header["RDATE"], scale="utc").jd
    days = (np.asarray(data["DATE"]) - reference) + np.asarray(data["TIME"])
    hour = np.radians(geometry.header["GSTIA0"] + geometry.header["DEGPDY"] * days) - ra
    worst = 0.0
    for row in range(0, len(data), 7):
        s = np.array([np.cos(dec) * np.cos(hour[row]), -np.cos(dec) * np.sin(hour[row]), np.sin(dec)])
        u_axis = np.cross([0, 0, 1], s)
        u_axis /= np.linalg.norm(u_axis)
        v_axis = np.cross(s, u_axis)
        code = int(data["BASELINE"][row])
        baseline = place[code // 256] - place[code % 256]
        expected = np.array([u_axis @ baseline, v_axis @ baseline, s @ baseline])
        worst = max(worst, np.abs(expected - C * np.array([data[axis][row] for axis in ("UU", "VV", "WW")])).max())
    return float(worst * 1e3)


def sample():
    with fits.open(os.path.join(SAMPLES, "formats.idifits")) as hdus:
        uv = hdus["UV_DATA"]
        cube = canonical(uv, "FLUX")
        shape = cube.shape[:4]
        weight = weights(uv, shape)
        frequency = hdus["FREQUENCY"]
        bands = np.asarray(frequency.data["BANDFREQ"], dtype=float).reshape(-1)
        widths = np.asarray(frequency.data["CH_WIDTH"], dtype=float).reshape(-1) * np.asarray(frequency.data["SIDEBAND"]).reshape(-1)
        nu = frequency.header["REF_FREQ"] + bands[:, None] + (np.arange(shape[2]) + 1 - frequency.header["REF_PIXL"]) * widths[:, None]
        reference = Time(hdus["ARRAY_GEOMETRY"].header["RDATE"], scale="utc").jd
        cells = []
        for row, band, channel, product in [(0, 0, 0, 0), (500, 1, 5, 1), (shape[0] - 1, 1, 7, 0)]:
            re, im = cube[row, band, channel, product]
            code = int(uv.data["BASELINE"][row])
            cells.append({"row": row, "band": band, "channel": channel, "product": product, "real": float(re), "imag": float(im),
                          "weight": float(weight[row, band, channel, product]), "mjd": float(times(uv.data)[row]),
                          "antennas": [code // 256, code % 256], "u": float(uv.data["UU"][row])})
        return {
            "tables": [hdu.name for hdu in hdus[1:]],
            "shape": [int(n) for n in shape],
            "stokes": [float(uv.header["CRVAL2"] + i * uv.header["CDELT2"]) for i in range(shape[3])],
            "frequencies": [float(f) for f in nu.ravel()],
            "antennas": [[str(n).strip(), [float(x) for x in xyz]] for n, xyz in zip(hdus["ARRAY_GEOMETRY"].data["ANNAME"], hdus["ARRAY_GEOMETRY"].data["STABXYZ"])],
            "source": [str(hdus["SOURCE"].data["SOURCE"][0]).strip(), float(hdus["SOURCE"].data["RAEPO"][0]), float(hdus["SOURCE"].data["DECEPO"][0])],
            "cells": cells,
            "digests": {
                "real": digest(cube[..., 0], "<f4"), "imag": digest(cube[..., 1], "<f4"), "weight": digest(weight, "<f4"),
                "time": digest(times(uv.data), "<f8"), "u": digest(uv.data["UU"], "<f8"), "v": digest(uv.data["VV"], "<f8"),
                "w": digest(uv.data["WW"], "<f8"), "integration": digest(uv.data["INTTIM"], "<f4"),
            },
            "gstia0": hdus["ARRAY_GEOMETRY"].header["GSTIA0"],
            "erfa_gmst82": float(np.degrees(erfa.gmst82(reference, 0.0))),
            "worst_uvw_mm": worst_uvw(hdus),
        }


def tables(bands):
    geometry = fits.BinTableHDU.from_columns([
        fits.Column("NOSTA", "1J", array=[5, 6, 7]),
        fits.Column("ORBPARM", "0D", array=np.zeros((3, 0))),
        fits.Column("ANNAME", "8A", array=["North", "South", "Hill"]),
        fits.Column("STABXYZ", "3D", array=[[6.378e6, 1.0, 2.0], [6.378e6, -50.0, 3.5], [6.3781e6, 20.0, -75.25]]),
    ], name="ARRAY_GEOMETRY")
    geometry.header.update({"ARRNAM": "Ridge", "RDATE": "2024-06-15", "TIMESYS": "UTC", "FRAME": "GEOCENTRIC", "GSTIA0": 263.5, "DEGPDY": 360.9856449733})
    antenna = fits.BinTableHDU.from_columns([
        fits.Column("ANTENNA_NO", "1J", array=[2, 3, 1]),
        fits.Column("ANNAME", "8A", array=["HILL", "north", "South"]),
    ], name="ANTENNA")
    frequency = fits.BinTableHDU.from_columns([
        fits.Column("BANDFREQ", f"{bands}D", array=[[2e7 * b for b in range(bands)]]),
        fits.Column("CH_WIDTH", f"{bands}E", array=[[5e5] * bands]),
        fits.Column("SIDEBAND", f"{bands}J", array=[[(-1) ** b for b in range(bands)]]),
        fits.Column("FREQID", "1J", array=[1]),
    ], name="FREQUENCY")
    source = fits.BinTableHDU.from_columns([
        fits.Column("ID_NO.", "1J", array=[4]),
        fits.Column("SOURCE", "16A", array=["Heath"]),
        fits.Column("EPOCH", "1D", array=[1950.0]),
        fits.Column("DECEPO", "1D", array=[-12.5]),
        fits.Column("RAEPO", "1D", array=[201.25]),
    ], name="SOURCE")
    return [geometry, antenna, frequency, source]


def made(name, axes, weight_length, integers):
    random = np.random.default_rng(20240615)
    rows, lengths = 5, [length for _, length, _, _ in axes]
    count = int(np.prod(lengths))
    size = dict((kind, length) for kind, length, _, _ in axes)
    if integers:
        stored = random.integers(-4000, 4000, (rows, count)).astype(np.int16)
        flux = fits.Column("VIS", f"{count}I", array=stored)
    else:
        values = random.normal(size=(rows, count)).astype(np.float32)
        values[1, 3] = np.nan
        flux = fits.Column("VIS", f"{count}E", array=values)
    columns = [
        fits.Column("TIME", "1D", array=0.75 + np.arange(rows) / 8),
        flux,
        fits.Column("BASELINE", "1J", array=[258, 259, 515, 258, 257]),
        fits.Column("WW", "1E", array=random.normal(size=rows) * 1e-6),
        fits.Column("SOURCE_ID", "1J", array=[4] * rows),
        fits.Column("VV", "1D", array=random.normal(size=rows) * 1e-6),
        fits.Column("DATE", "1D", array=2460476.5 + np.arange(rows) // 3),
        fits.Column("UU---SIN", "1E", array=random.normal(size=rows) * 1e-6),
    ]
    if weight_length:
        columns.insert(3, fits.Column("WEIGHT", f"{weight_length}E", array=random.uniform(-1, 5, (rows, weight_length)) if weight_length > 1 else random.uniform(-1, 5, rows)))
    uv = fits.BinTableHDU.from_columns(columns, name="UV_DATA")
    uv.header["TMATX2"] = True
    if integers:
        uv.header.update({"TSCAL2": 0.25, "TZERO2": 10.0})
    uv.header["MAXIS"] = len(axes)
    for i, (kind, length, value, step) in enumerate(axes):
        uv.header.update({f"MAXIS{i + 1}": length, f"CTYPE{i + 1}": kind, f"CRVAL{i + 1}": value, f"CDELT{i + 1}": step, f"CRPIX{i + 1}": 1.0})
    out = io.BytesIO()
    fits.HDUList([fits.PrimaryHDU(), uv] + tables(size["BAND"])).writeto(out)
    with fits.open(io.BytesIO(out.getvalue())) as hdus:
        uv = hdus["UV_DATA"]
        cube = canonical(uv, "VIS")
        shape = cube.shape[:4]
        weight = np.asarray(cube[..., 2]) if size["COMPLEX"] == 3 else weights(uv, shape)
        nu = [1.6e9 + 2e7 * b + 5e5 * (-1) ** b * c for b in range(shape[1]) for c in range(shape[2])]
        return {
            "name": name, "shape": [int(n) for n in shape], "base64": base64.b64encode(out.getvalue()).decode(),
            "real": plain(cube[..., 0]), "imag": plain(cube[..., 1]), "weight": plain(weight),
            "time": plain(times(uv.data)), "u": plain(uv.data["UU---SIN"]), "v": plain(uv.data["VV"]), "w": plain(uv.data["WW"]),
            "baseline": [int(b) for b in uv.data["BASELINE"]], "frequencies": nu,
        }


FREQ, BAND = ("FREQ", 3, 1.6e9, 5e5), ("BAND", 2, 1.0, 1.0)
STOKES, REVERSED = ("STOKES", 2, -5.0, -1.0), ("STOKES", 2, -6.0, 1.0)
PAIR, TRIPLE, RA = ("COMPLEX", 2, 1.0, 1.0), ("COMPLEX", 3, 1.0, 1.0), ("RA", 1, 201.25, 1.0)

if __name__ == "__main__":
    print(json.dumps({
        "sample": sample(),
        "made": [
            made("channels fastest, parts slowest, a weight a product and sub-band", [FREQ, BAND, STOKES, RA, PAIR], 4, False),
            made("sub-bands fastest, weights in the matrix", [BAND, RA, TRIPLE, REVERSED, FREQ], 0, False),
            made("scaled integers, a weight a sub-band", [STOKES, PAIR, BAND, FREQ], 2, True),
        ],
    }, allow_nan=False))
