"""The sample inputs as Astropy and NumPy see them, from their bytes alone.

For each file: its shape and some cells as astropy.io.fits reads them; u, v, w recomputed from the antenna table by vector
algebra (axes w = s, u = pole x s, v = w x u in the frame of the hour angle), worst difference in millimetres; and for the
files without faults and atmosphere, chi-square a degree of freedom of the samples against the sky of their scenario, by the
measurement equation (Thompson, Moran & Swenson 2017, Interferometry and Synthesis in Radio Astronomy, 3rd ed., Eq. 3.7).
Prints JSON.
"""
import json
import os

import numpy as np
from astropy.io import fits
from astropy.time import Time

C = 299792458.0
SAMPLES = os.path.join(os.path.dirname(os.path.abspath(__file__)), "..", "..", "sample-inputs")
ARCMIN = np.pi / 180 / 60

# flux Jy, east and north arcmin, spectral index, major and minor arcsec, angle deg: as in the scenarios
SKIES = {
    "clean": [(1.2, 0, 0, -0.7, 0, 0, 0), (0.30, 4, -2.5, -0.8, 0, 0, 0), (0.15, -6, 5, 0, 0, 0, 0), (0.5, -2, -5, 0, 25, 15, 40)],
    "wide-field": [(0.8, 0, 0, 0, 0, 0, 0), (0.4, 17, 9, -0.7, 0, 0, 0), (0.3, -22, 4, 0, 0, 0, 0), (0.2, 6, -21, 0, 0, 0, 0)],
    "holes": [(0.6, 0, 0, 0, 0, 0, 0), (2.0, 1, 1.5, 0, 110, 70, 20), (0.2, -5, 4, 0, 0, 0, 0)],
}


def sinc_loss(uvw, rates, l, m, n, width, tau, nu):
    delay = uvw[0] * l + uvw[1] * m + uvw[2] * (n - 1)
    rate = rates[0] * l + rates[1] * m + rates[2] * (n - 1)
    return np.sinc(width * delay) * np.sinc(rate * nu * tau)


def model(sky, uvw, dec, nu, width, tau):
    """(rows, channels) complex; u, v, w in seconds (rows, 1), nu (channels)."""
    total = np.zeros((uvw[0].shape[0], nu.size), dtype=complex)
    u, v, w = uvw
    omega = 7.292115e-5
    rates = (omega * (w * np.cos(dec) - v * np.sin(dec)), omega * u * np.sin(dec), -omega * u * np.cos(dec))
    for flux, east, north, index, major, minor, angle in sky:
        l, m = np.sin(east * ARCMIN), np.sin(north * ARCMIN)
        n = np.sqrt(1 - l * l - m * m)
        spectrum = flux * (nu / nu.mean()) ** index
        a, b, t = major / 60 * ARCMIN, minor / 60 * ARCMIN, np.radians(angle)
        along, across = u * np.sin(t) + v * np.cos(t), u * np.cos(t) - v * np.sin(t)
        size = np.exp(-(np.pi * nu) ** 2 * ((a * along) ** 2 + (b * across) ** 2) / (4 * np.log(2)))
        phase = np.exp(-2j * np.pi * nu * (u * l + v * m + w * (n - 1)))
        total += spectrum * size * phase * sinc_loss(uvw, rates, l, m, n, width, tau, nu)
    return total


def look_at(name):
    with fits.open(os.path.join(SAMPLES, f"{name}.uvfits")) as hdus:
        groups, antennas = hdus[0], hdus[1]
        header, data = groups.header, groups.data
        uvw = [data.par(f"{axis}---SIN").astype(float) for axis in ("UU", "VV", "WW")]
        names = [header[f"PTYPE{i + 1}"] for i in range(header["PCOUNT"])]
        parts = [i for i, parameter in enumerate(names) if parameter == "DATE"]
        day = header[f"PZERO{parts[0] + 1}"]
        raw = np.fromfile(os.path.join(SAMPLES, f"{name}.uvfits"), dtype=">f4", offset=groups._data_offset,
                          count=header["GCOUNT"] * (header["PCOUNT"] + data.data[0].size)).reshape(header["GCOUNT"], -1)
        fraction = sum(raw[:, i].astype(float) for i in parts)
        code = np.round(raw[:, names.index("BASELINE")]).astype(int)
        first, second = code // 256, code % 256
        table = antennas.data
        place = {int(number): np.array(xyz, dtype=float) for number, xyz in zip(table["NOSTA"], table["STABXYZ"])}
        reference = Time(antennas.header["RDATE"], scale="utc").jd
        turned = np.radians(antennas.header["GSTIA0"] + antennas.header["DEGPDY"] * (day - reference + fraction))
        ra, dec = [np.radians(header[f"CRVAL{i}"]) for i in range(1, header["NAXIS"] + 1) if header.get(f"CTYPE{i}") in ("RA", "DEC")]
        hour = turned - ra
        worst = 0.0
        for row in range(0, header["GCOUNT"], 7):
            s = np.array([np.cos(dec) * np.cos(hour[row]), -np.cos(dec) * np.sin(hour[row]), np.sin(dec)])
            u_axis = np.cross([0, 0, 1], s)
            u_axis /= np.linalg.norm(u_axis)
            v_axis = np.cross(s, u_axis)
            baseline = place[first[row]] - place[second[row]]
            expected = np.array([u_axis @ baseline, v_axis @ baseline, s @ baseline])
            worst = max(worst, np.abs(expected - C * np.array([axis[row] for axis in uvw])).max())
        cells = []
        for row, channel, product in [(0, 0, 0), (17, 3, 1), (header["GCOUNT"] - 1, 5, 0)]:
            cell = data.data[row, 0, 0, 0, channel, product]
            cells.append({"row": row, "channel": channel, "product": product, "real": float(cell[0]), "imag": float(cell[1]),
                          "weight": float(cell[2]), "mjd": float(day - 2400000.5 + fraction[row]), "antennas": [int(first[row]), int(second[row])],
                          "u": float(uvw[0][row]), "v": float(uvw[1][row]), "w": float(uvw[2][row])})
        out = {"name": name, "groups": header["GCOUNT"], "shape": list(data.data.shape[1:]), "worst_uvw_mm": float(worst * 1e3), "cells": cells}
        if name in SKIES:
            axis = [i for i in range(1, header["NAXIS"] + 1) if header.get(f"CTYPE{i}") == "FREQ"][0]
            nu = header[f"CRVAL{axis}"] + header[f"CDELT{axis}"] * np.arange(header[f"NAXIS{axis}"])
            tau = float(raw[0, names.index("INTTIM")])
            # Single-precision u, v, w are worth 0.01 rad at the edge of the wide field: far below the noise.
            expected = model(SKIES[name], [axis[:, None] for axis in uvw], dec, nu, header[f"CDELT{axis}"], tau)
            values = data.data[:, 0, 0, 0].astype(float)
            residual = values[..., 0] + 1j * values[..., 1] - expected[..., None]
            out["chi_square"] = float(np.mean(np.abs(residual) ** 2 * values[..., 2]) / 2)
            out["degrees_of_freedom"] = int(2 * residual.size)
        return out


print(json.dumps([look_at(name) for name in ("clean", "three-faults", "wide-field", "holes")], indent=1))
