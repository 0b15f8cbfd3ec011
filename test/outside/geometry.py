"""Reference values for sidereal time, Earth frames, horizontal angles and u, v, w, from ERFA and Astropy.

Prints JSON. Everything rests on ERFA (the IAU's SOFA routines) and vector algebra, not on the matrix under test.
"""
import json

import erfa
import numpy as np
from astropy import units
from astropy.coordinates import EarthLocation

DEGREE = np.pi / 180


def sidereal():
    cases = []
    for mjd in [15020.0, 45728.0, 46895.80625, 51544.5, 54335.0, 58849.25, 60476.52425925926, 61099.999, 88069.75]:
        cases.append({"mjd_ut1": mjd, "gmst_rad": float(erfa.gmst82(2400000.5, mjd))})
    return cases


def geodetic():
    cases = []
    for latitude, longitude, height in [(34.0, -107.6, 2000.0), (-31.2, 116.4, 420.0), (0.0, 180.0, 0.0), (89.9, 12.0, -30.0), (-90.0, 0.0, 2800.0)]:
        place = EarthLocation.from_geodetic(longitude * units.deg, latitude * units.deg, height * units.m)
        cases.append({
            "latitude_deg": latitude, "longitude_deg": longitude, "height_m": height,
            "geocentric_m": [float(axis.to_value(units.m)) for axis in place.geocentric],
        })
    return cases


def horizontal():
    cases = []
    for latitude, hour_angle, declination in [(34.0, 37.5, 22.0), (-31.2, -95.0, -28.0), (52.9, 170.0, 80.0), (-31.2, 12.0, 41.0), (10.0, -3.0, 10.0)]:
        args = hour_angle * DEGREE, declination * DEGREE, latitude * DEGREE
        azimuth, elevation = erfa.hd2ae(*args)
        cases.append({
            "latitude_deg": latitude, "hour_angle_deg": hour_angle, "declination_deg": declination,
            "azimuth_rad": float(azimuth), "elevation_rad": float(elevation), "parallactic_rad": float(erfa.hd2pa(*args)),
        })
    return cases


def uvw():
    """u, v, w on axes of date: the baseline is taken to the celestial frame of date by the Earth's rotation, and
    projected on w = s, u = pole x s, v = w x u. Aberration and polar motion are left out."""
    cases = []
    for mjd, ra, dec, baseline in [
        (58849.25, 83.633, 22.0145, [95.3190667793, -30.236989075, 0.0]),
        (61100.5, 127.5, -28.0, [1295.25156077, 114.501149843, 747.81139401]),
        (60476.5, 300.0, 71.0, [-683.457028523, 491.236538817, 366.356592808]),
    ]:
        tt = mjd + 69.184 / 86400
        to_date = erfa.pnm06a(2400000.5, tt)
        s = to_date @ erfa.s2c(ra * DEGREE, dec * DEGREE)
        ra_of_date, dec_of_date = erfa.c2s(s)
        gast = erfa.gst06a(2400000.5, mjd, 2400000.5, tt)
        celestial = erfa.rz(gast, np.eye(3)).T @ np.array(baseline)
        u = np.cross([0, 0, 1], s)
        u /= np.linalg.norm(u)
        v = np.cross(s, u)
        cases.append({
            "sidereal_rad": float(gast), "right_ascension_rad": float(ra_of_date), "declination_rad": float(dec_of_date),
            "baseline_m": baseline, "uvw_m": [float(axis @ celestial) for axis in (u, v, s)],
        })
    return cases


print(json.dumps({"made_with": "ERFA through pyerfa, Astropy", "sidereal": sidereal(), "geodetic": geodetic(), "horizontal": horizontal(), "uvw": uvw()}, indent=1))
