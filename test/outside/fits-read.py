"""A FITS file as Astropy reads it, cell by cell. Usage: fits-read.py PATH..., a PATH of astropy:NAME being a file among
the test data that Astropy installs. Prints a JSON list of those that exist; what JSON has no number for is a string.
"""
import json
import os
import sys

import numpy as np
from astropy.io import fits


def number(value):
    if isinstance(value, (complex, np.complexfloating)):
        return [number(value.real), number(value.imag)]
    if isinstance(value, (bool, np.bool_)):
        return bool(value)
    if isinstance(value, (int, np.integer)):
        return int(value) if abs(int(value)) < 2**53 else str(int(value))
    value = float(value)
    if np.isnan(value):
        return "NaN"
    return value if np.isfinite(value) else ("Infinity" if value > 0 else "-Infinity")


def cell(value):
    if isinstance(value, (str, np.str_)):
        return str(value).rstrip()
    return [number(item) for item in np.ravel(np.asarray(value))]


def groups(hdu):
    """Parameters by their place and the array by row, first axis fastest, physical values."""
    data = hdu.data
    count = hdu.header["PCOUNT"]
    return {
        "names": [hdu.header.get(f"PTYPE{i + 1}", "").strip() for i in range(count)],
        "parameters": [[number(v) for v in np.asarray(data.par(i), dtype=np.float64)] for i in range(count)],
        "shape": list(data.data.shape),
        "array": [number(v) for v in np.ravel(data.data)],
    }


def table(hdu):
    rows = {}
    for name, column in zip(hdu.columns.names, hdu.columns):
        rows[name] = [cell(hdu.data[name][row]) if hdu.data[name].size else [] for row in range(len(hdu.data))]
    return {"name": hdu.name, "columns": rows}


def read(path):
    with fits.open(path, memmap=False) as hdus:
        out = {"tables": [table(h) for h in hdus[1:] if isinstance(h, fits.BinTableHDU)]}
        if isinstance(hdus[0], fits.GroupsHDU):
            out["groups"] = groups(hdus[0])
        elif hdus[0].data is not None:
            out["image"] = {"shape": list(hdus[0].data.shape), "values": [number(v) for v in np.ravel(hdus[0].data)]}
        keywords = [k for k in hdus[0].header if k not in ("", "COMMENT", "HISTORY", "CONTINUE")]
        out["keywords"] = {k: v if isinstance(v, str) else number(v) for k, v in ((k, hdus[0].header[k]) for k in keywords)}
    return out


def located(path):
    if not path.startswith("astropy:"):
        return path
    return os.path.join(os.path.dirname(fits.__file__), "tests", "data", path.removeprefix("astropy:"))


if __name__ == "__main__":
    paths = [located(path) for path in sys.argv[1:]]
    print(json.dumps([{"path": path, **read(path)} for path in paths if os.path.exists(path)], allow_nan=False))
