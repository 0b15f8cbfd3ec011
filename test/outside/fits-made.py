"""Small FITS files that Astropy makes, each with what Astropy reads from it: random groups of float32 and of scaled
16-bit integers, a table with a column of every type, images. Invented numbers, seeded. Prints JSON.
"""
import base64
import importlib.util
import json
import os
import tempfile

import numpy as np
from astropy.io import fits

HERE = os.path.dirname(os.path.abspath(__file__))
spec = importlib.util.spec_from_file_location("fits_read", os.path.join(HERE, "fits-read.py"))
fits_read = importlib.util.module_from_spec(spec)
spec.loader.exec_module(fits_read)


def axes(header, names):
    for n, (ctype, value, step) in enumerate(names, start=2):
        header[f"CTYPE{n}"] = ctype
        header[f"CRVAL{n}"] = float(value)
        header[f"CDELT{n}"] = float(step)
        header[f"CRPIX{n}"] = 1.0
    return header


AXES = [("COMPLEX", 1, 1), ("STOKES", -5, -1), ("FREQ", 1.4e9, -62500), ("IF", 1, 1), ("RA", 10.5, 1), ("DEC", -45.25, 1)]


def random_groups(bitpix):
    """Three groups; Astropy's own writer puts PSCAL, PZERO, BSCALE and BZERO."""
    random = np.random.default_rng(7)
    shape = (3, 1, 1, 1, 4, 2, 3)
    data = random.normal(size=shape).astype(np.float32)
    data[..., 2] = np.abs(data[..., 2])
    if bitpix == -32:
        data[0, ..., 0, 0, 2] = -1.5
        data[1, ..., 1, 1, 0] = np.nan
        data[2, ..., 2, 0, 2] = np.inf
        parameters = [random.normal(size=3) * 1e-6 for _ in range(3)]
        parameters += [np.array([258.0, 259.0, 515.0]), np.full(3, 60476.0), np.array([0.25, 0.25, 0.3])]
    else:
        data = np.round(data * 100).astype(np.int16)
        parameters = [np.array([100, -200, 300], dtype=np.int16) for _ in range(3)]
        parameters += [np.array([258, 259, 515], dtype=np.int16), np.zeros(3, np.int16), np.array([25, 25, 30], dtype=np.int16)]
    scales = [1e-9, 1e-9, 1e-9, 1.0, 1.0, 1e-2] if bitpix == 16 else [1.0] * 6
    zeros = [0.0, 0.0, 0.0, 0.0, 2460476.5 if bitpix == 16 else 2400000.5, 0.0]
    names = ["UU---SIN", "VV---SIN", "WW---SIN", "BASELINE", "DATE", "DATE"]
    group = fits.GroupData(data, parnames=names, pardata=parameters, bitpix=bitpix)
    hdu = fits.GroupsHDU(group, axes(fits.Header(), AXES))
    for i, (scale, zero) in enumerate(zip(scales, zeros), start=1):
        hdu.header[f"PSCAL{i}"] = scale
        hdu.header[f"PZERO{i}"] = zero
    if bitpix == 16:
        hdu.header["BSCALE"] = 0.01
        # Not 0.5, say: Astropy passes over BZERO in random groups (it looks for BZEROS).
        hdu.header["BZERO"] = 0.0
    hdu.header["OBJECT"] = "It's Field A"
    hdu.header["BUNIT"] = "JY"
    return fits.HDUList([hdu])


def every_column():
    names = np.array(["Ridge", "", "West 12"])
    columns = [
        fits.Column("FLAG", "2L", array=np.array([[True, False], [False, False], [True, True]])),
        fits.Column("BITS", "11X", array=np.array([[1, 0, 0, 1, 0, 0, 0, 1, 1, 0, 1], [0] * 11, [1] * 11], dtype=bool)),
        fits.Column("BYTE", "1B", array=np.array([0, 128, 255], dtype=np.uint8)),
        fits.Column("SHORT", "2I", array=np.array([[-32768, 32767], [1, -1], [0, 7]], dtype=np.int16)),
        fits.Column("LONG", "1J", array=np.array([-2147483648, 0, 2147483647], dtype=np.int32)),
        fits.Column("LONGER", "1K", array=np.array([-(2**53) - 1, 0, 2**63 - 1], dtype=np.int64)),
        fits.Column("NAME", "8A", array=names),
        fits.Column("SINGLE", "1E", array=np.array([1.5, np.nan, -np.inf], dtype=np.float32)),
        fits.Column("DOUBLE", "6D", dim="(3,2)", array=np.arange(18, dtype=np.float64).reshape(3, 2, 3) / 7),
        fits.Column("PAIR", "1C", array=np.array([1 + 2j, -0.5j, 3], dtype=np.complex64)),
        fits.Column("PAIRS", "2M", array=np.array([[1 + 2j, 3 - 4j], [0, 0], [0.1, 0.2j]], dtype=np.complex128)),
        fits.Column("VARIES", "PE()", array=np.array([np.array([1, 2, 3], np.float32), np.array([], np.float32), np.array([9], np.float32)], dtype=object)),
        fits.Column("VARIES64", "QJ()", array=np.array([np.array([], np.int32), np.array([4, 5], np.int32), np.array([6], np.int32)], dtype=object)),
        fits.Column("SCALED", "1I", array=np.array([0, 6, -39], dtype=np.int16)),
        fits.Column("UNSIGNED", "1J", bzero=2**31, array=np.array([0, 2**31, 2**32 - 1], dtype=np.uint32)),
    ]
    table = fits.BinTableHDU.from_columns(columns, name="EVERY")
    # Columns made with a scale are rounded by Astropy before it scales them: give the scale to the stored numbers.
    table.header["TSCAL14"] = 0.25
    table.header["TZERO14"] = 100.0
    primary = fits.PrimaryHDU()
    primary.header["LONGTEXT"] = ("A string far too long for one card, with a slash / and an ampersand & in it. " * 3).strip()
    return fits.HDUList([primary, table])


def image(bitpix):
    values = (np.arange(12).reshape(3, 4) * 3 - 7).astype(np.uint8 if bitpix == 8 else f">i{bitpix // 8}" if bitpix > 0 else f">f{-bitpix // 8}")
    return fits.HDUList([fits.PrimaryHDU(values)])


def main():
    made = {
        "groups-float32": random_groups(-32),
        "groups-int16": random_groups(16),
        "every-column": every_column(),
        **{f"image{bitpix}": image(bitpix) for bitpix in (8, 16, 32, 64, -32, -64)},
    }
    out = []
    for name, hdus in made.items():
        with tempfile.TemporaryDirectory() as folder:
            path = os.path.join(folder, "made.fits")
            hdus.writeto(path)
            with open(path, "rb") as file:
                content = file.read()
            out.append({"name": name, "base64": base64.b64encode(content).decode(), **fits_read.read(path)})
    print(json.dumps(out, allow_nan=False, indent=None))


main()
