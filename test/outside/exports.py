"""Tables and flags that visvet wrote, as Astropy, NumPy and Python's csv module read them. Prints JSON."""

import csv
import json
import math
import sys

import numpy as np
from astropy.io import fits

folder = sys.argv[1]


def number(text):
    """An empty cell is missing, NaN an unknown number."""
    if text == "":
        return None
    value = float(text)
    return "NaN" if math.isnan(value) else value


def table(name):
    with open(f"{folder}/tables/{name}.csv", newline="", encoding="utf-8") as file:
        return list(csv.DictReader(file))


antennas = table("antenna")
block = np.genfromtxt(f"{folder}/tables/baseline.csv", delimiter=",", names=True, dtype=None, encoding="utf-8")

with fits.open(f"{folder}/flags.fits") as hdus:
    hdus.verify("exception")
    flag = hdus["FLAG"]
    flags = [
        {
            "source": int(row["SOURCE_ID"]),
            "ants": [int(v) for v in row["ANTS"]],
            "timerang": [float(v) for v in row["TIMERANG"]],
            "bands": [int(v) for v in np.atleast_1d(row["BANDS"])],
            "chans": [int(v) for v in row["CHANS"]],
            "pflags": [int(v) for v in row["PFLAGS"]],
            "reason": row["REASON"].strip(),
            "severity": int(row["SEVERITY"]),
        }
        for row in flag.data
    ]
    header = {key: flag.header[key] for key in ("NO_STKD", "STK_1", "NO_BAND", "NO_CHAN", "RDATE")}
    geometry = hdus["ARRAY_GEOMETRY"]
    stations = [[row["ANNAME"].strip(), int(row["NOSTA"]), [float(v) for v in row["STABXYZ"]]] for row in geometry.data]
    # Greenwich mean sidereal time at 0h UT1 of RDATE, IAU 1982 (Aoki et al. 1982, A&A 105, 359), degrees.
    day = (np.datetime64(flag.header["RDATE"]) - np.datetime64("2000-01-01")) / np.timedelta64(1, "D") - 0.5
    century = day / 36525
    seconds = 24110.54841 + 8640184.812866 * century + 0.093104 * century**2 - 6.2e-6 * century**3
    sidereal = {"header": float(geometry.header["GSTIA0"]), "computed": (seconds / 240) % 360}

with fits.open(f"{folder}/weights.uvfits") as hdus:
    hdus.verify("exception")
    data = np.asarray(hdus[0].data["DATA"])
    weights = {"negative": int((data[..., 2] < 0).sum()), "sum": float(np.abs(data[..., 2]).sum(dtype=np.float64))}

with fits.open(f"{folder}/table.uvfits") as hdus:
    hdus.verify("exception")
    table_rows = hdus[-1].data
    group_flags = {
        "name": hdus[-1].header["EXTNAME"],
        "ants": [[int(v) for v in row["ANTS"]] for row in table_rows],
        "chans": [[int(v) for v in row["CHANS"]] for row in table_rows],
        "pflags": [[bool(v) for v in row["PFLAGS"]] for row in table_rows],
        "reason": [row["REASON"].strip() for row in table_rows],
    }

print(
    json.dumps(
        {
            "weights": weights,
            "group_flags": group_flags,
            "antennas": [{"antenna": int(row["antenna"]), "name": row["name"], "coherence": number(row["coherence"])} for row in antennas],
            "baselines": {name: [float(v) for v in block[name]] for name in ("antenna1", "antenna2", "uv_max_m")},
            "flags": flags,
            "header": header,
            "stations": stations,
            "sidereal": sidereal,
        }
    )
)
