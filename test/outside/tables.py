"""What Python's csv and NumPy read in the sample table of text: no line of ours between the file and these numbers.

NumPy's float32 rounds a decimal to the nearest single-precision number, as the table promises to be printed.
"""
import csv
import hashlib
import json
import sys

import numpy as np

with open("sample-inputs/formats.csv", newline="") as file:
    rows = list(csv.reader(file))
names, cells = rows[0], rows[1:]
column = {name: [row[i] for row in cells] for i, name in enumerate(names)}


def bits(name):
    values = np.array([float(cell) for cell in column[name]], dtype=np.float64).astype("<f4")
    return hashlib.sha256(values.tobytes()).hexdigest()


# Seconds since MJD 61147, as the column map says.
times = 61147 + np.array([float(cell) for cell in column["time"]]) / 86400
# Nanoseconds that were single-precision seconds.
u = (np.array([float(cell) for cell in column["u"]]) / 1e9).astype("<f4")
json.dump(
    {
        "names": names,
        "rows": len(cells),
        "real": bits("real"),
        "imag": bits("imag"),
        "weight": bits("weight"),
        "u": hashlib.sha256(u.tobytes()).hexdigest(),
        "firstTime": float(times[0]),
        "lastTime": float(times[-1]),
        "polarizations": sorted(set(column["polarization"])),
    },
    sys.stdout,
    indent=1,
)
print()
