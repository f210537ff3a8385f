"""Water by the industrial formulation, without the property library: most sheets are of water, and loading that library
takes longer than the whole audit of one.

IAPWS-IF97 (R7-97(2012)), region 1 (density) and region 4 (saturation), 273.15 to 623.15 K, up to 100 MPa; coefficients
from memory, checked in the tests against the verification values of the release and two other libraries; within
0.02 % of IAPWS-95 in the density and 0.025 % in the vapour pressure.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from lowpoint.kinds import Floats

__all__ = ["SOURCE", "covers", "density", "vapour_pressure"]

SOURCE = "IAPWS-IF97"
COLDEST, HOTTEST, STRONGEST = 273.15, 623.15, 100e6
"""K, K, Pa: the range of region 1."""
GAS = 461.526
"""J/(kg K), specific gas constant of the formulation."""
_SATURATION = (
    0.11670521452767e4, -0.72421316703206e6, -0.17073846940092e2, 0.12020824702470e5, -0.32325550322333e7,
    0.14915108613530e2, -0.48232657361591e4, 0.40511340542057e6, -0.23855557567849, 0.65017534844798e3,
)  # fmt: skip
_I = np.array([0] * 8 + [1] * 6 + [2] * 5 + [3] * 3 + [4] * 3 + [5, 8, 8, 21, 23, 29, 30, 31, 32], float)
_J = np.array([-2, -1, 0, 1, 2, 3, 4, 5, -9, -7, -1, 0, 1, 3, -3, 0, 1, 3, 17, -4, 0, 6, -5, -2, 10, -8, -11, -6, -29,
               -31, -38, -39, -40, -41], float)  # fmt: skip
_N = np.array([
    0.14632971213167, -0.84548187169114, -0.37563603672040e1, 0.33855169168385e1, -0.95791963387872,
    0.15772038513228, -0.16616417199501e-1, 0.81214629983568e-3, 0.28319080123804e-3, -0.60706301565874e-3,
    -0.18990068218419e-1, -0.32529748770505e-1, -0.21841717175414e-1, -0.52838357969930e-4, -0.47184321073267e-3,
    -0.30001780793026e-3, 0.47661393906987e-4, -0.44141845330846e-5, -0.72694996297594e-15, -0.31679644845054e-4,
    -0.28270797985312e-5, -0.85205128120103e-9, -0.22425281908000e-5, -0.65171222895601e-6, -0.14341729937924e-12,
    -0.40516996860117e-6, -0.12734301741641e-8, -0.17424871230634e-9, -0.68762131295531e-18, 0.14478307828521e-19,
    0.26335781662795e-22, -0.11947622640071e-22, 0.18228094581404e-23, -0.93537087292458e-25,
])  # fmt: skip


def covers(fluid: str, t: Floats, p: Floats) -> bool:
    """Is the liquid water, within the range of these equations? NaN is within any range."""
    if fluid != "water":
        return False
    return not bool(((t < COLDEST) | (t > HOTTEST) | (p > STRONGEST)).any())


def vapour_pressure(t: Floats) -> Any:
    """Saturation pressure, Pa, of a temperature in K (equation 30)."""
    n = _SATURATION
    theta = t + n[8] / (t - n[9])
    a = theta * theta + n[0] * theta + n[1]
    b = n[2] * theta * theta + n[3] * theta + n[4]
    c = n[5] * theta * theta + n[6] * theta + n[7]
    return 1e6 * (2.0 * c / (-b + np.sqrt(b * b - 4.0 * a * c))) ** 4


def density(t: Floats, p: Floats) -> Any:
    """Density of the liquid, kg/m3, at K and Pa (equation 7); of the saturated one where p is NaN, NaN where it boils.

    Within 0.02 % of the vapour pressure it counts as saturated.
    """
    saturation = vapour_pressure(t)
    p = np.where(np.isnan(p), saturation, p)
    pi, tau = p / 16.53e6, 1386.0 / t
    terms = -_N * _I * (7.1 - pi[:, None]) ** (_I - 1.0) * (tau[:, None] - 1.222) ** _J
    found = p / (GAS * t * pi * terms.sum(axis=1))
    return np.where(p < saturation * (1.0 - 2e-4), np.nan, found)
