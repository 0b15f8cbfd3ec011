"""How much of a Gaussian and of a disk a spacing sees, by numerical transforms in SciPy. Prints JSON."""
import json

import numpy as np
from scipy.integrate import quad
from scipy.special import j0

fractions = [0.2, 0.25, 0.5, 0.6, 0.82, 1.0]


def gaussian(f):
    """Hankel transform of a Gaussian of full width 1 at the spacing f."""
    profile = lambda r: np.exp(-4 * np.log(2) * r * r)
    value, _ = quad(lambda r: 2 * np.pi * r * profile(r) * j0(2 * np.pi * r * f), 0, 6, epsabs=1e-13, epsrel=1e-12, limit=200)
    total, _ = quad(lambda r: 2 * np.pi * r * profile(r), 0, 6, epsabs=1e-13, epsrel=1e-12)
    return value / total


print(json.dumps({"gaussian": [{"scale_times_spacing": f, "seen": float(gaussian(f))} for f in fractions]}, indent=1))
