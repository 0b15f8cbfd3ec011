"""Pixel to sky in the SIN projection, pixels of every BITPIX, and a Fourier transform, by Astropy and NumPy."""
import base64
import io
import json

import numpy as np
from astropy.io import fits
from astropy.wcs import WCS

PIXELS = [[1, 1], [40, 25], [64, 64], [3, 61]]


def header(extra):
    out = fits.Header()
    out["NAXIS"] = 2
    out["NAXIS1"] = 64
    out["NAXIS2"] = 64
    out["CTYPE1"] = "RA---SIN"
    out["CTYPE2"] = "DEC--SIN"
    out["CRVAL1"] = 127.5
    out["CRVAL2"] = -28.25
    out["CRPIX1"] = 33.0
    out["CRPIX2"] = 31.5
    for key, value in extra.items():
        out[key] = value
    return out


SYSTEMS = {
    "CDELT": {"CDELT1": -0.01, "CDELT2": 0.01},
    "CDELT, right-handed": {"CDELT1": 0.01, "CDELT2": 0.01},
    "CROTA": {"CDELT1": -0.01, "CDELT2": 0.012, "CROTA2": 30.0},
    "PC": {"CDELT1": -0.01, "CDELT2": 0.01, "PC1_1": 0.8, "PC1_2": -0.6, "PC2_1": 0.6, "PC2_2": 0.8},
    "CD": {"CD1_1": -0.008, "CD1_2": 0.006, "CD2_1": 0.006, "CD2_2": 0.008},
}


def places():
    return {
        name: {
            "cards": extra,
            "sky": WCS(header(extra)).wcs_pix2world(np.array(PIXELS, float), 1).tolist(),
        }
        for name, extra in SYSTEMS.items()
    }


def image(bitpix):
    """A small image of each kind, as the bytes of a file and as Astropy reads it back."""
    kinds = {8: ">u1", 16: ">i2", 32: ">i4", 64: ">i8", -32: ">f4", -64: ">f8"}
    values = (np.arange(16 * 20).reshape(16, 20) % 97).astype(kinds[bitpix])
    hdu = fits.PrimaryHDU(values)
    for key, value in header({"CDELT1": -0.01, "CDELT2": 0.01}).items():
        if not key.startswith("NAXIS"):
            hdu.header[key] = value
    if bitpix > 0:
        hdu.header["BLANK"] = 5
        hdu.header["BSCALE"] = 0.25
        hdu.header["BZERO"] = -3.0
    else:
        hdu.data[2, 3] = np.nan
    buffer = io.BytesIO()
    if bitpix > 0:
        # Astropy would scale on writing: the raw integers and the cards go in as they are.
        raw = hdu.header.tostring().encode() + values.tobytes()
        raw += b"\0" * (-len(raw) % 2880)
        buffer.write(raw)
    else:
        hdu.writeto(buffer)
    buffer.seek(0)
    read = fits.open(buffer)[0].data.astype(float)
    return {
        "file": base64.b64encode(buffer.getvalue()).decode(),
        "pixels": [None if np.isnan(value) else float(value) for value in read.ravel()],
    }


def transform():
    rng = np.random.default_rng(20260301)
    values = np.round(rng.normal(size=(16, 16)) + 1j * rng.normal(size=(16, 16)), 6)
    out = np.fft.fft2(values)
    back = np.fft.ifft2(values) * values.size
    return {
        "re": values.real.ravel().tolist(),
        "im": values.imag.ravel().tolist(),
        "forwardRe": out.real.ravel().tolist(),
        "forwardIm": out.imag.ravel().tolist(),
        "backwardRe": back.real.ravel().tolist(),
        "backwardIm": back.imag.ravel().tolist(),
    }


print(
    json.dumps(
        {
            "pixels": PIXELS,
            "places": places(),
            "images": {str(bitpix): image(bitpix) for bitpix in (8, 16, 32, 64, -32, -64)},
            "transform": transform(),
        }
    )
)
