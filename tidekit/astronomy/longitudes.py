"""Mean longitudes of Moon and Sun: the six angles of Doodson numbers.

References
----------
.. [1] Petit, G. and Luzum, B. (eds), "IERS Conventions (2010)", IERS Technical Note 36: eq. 5.43, fundamental
   arguments; eq. 5.15, Earth rotation angle; eq. 5.32, Greenwich mean sidereal time (IAU 2006).
.. [2] Doodson, A. T., "The harmonic development of the tide-generating potential", Proc. R. Soc. Lond. A 100
   (1921) 305-329: the angles tau, s, h, p, N' and p_s.
"""

from __future__ import annotations

import numpy as np
from numpy.polynomial import polynomial
from numpy.typing import ArrayLike, NDArray

from tidekit.astronomy.timescales import julian_centuries_tt

_ARCSECOND = np.pi / (180.0 * 3600.0)
_HOURS_PER_CENTURY = 36525.0 * 24.0

# Powers of Julian centuries TT along the first axis; columns l, l', F, D and Omega. [arcseconds]
_FUNDAMENTAL = np.array(
    [
        [485868.249036, 1287104.79305, 335779.526232, 1072260.70369, 450160.398036],
        [1717915923.2178, 129596581.0481, 1739527262.8478, 1602961601.2090, -6962890.5431],
        [31.8792, -0.5532, -12.7512, -6.3706, 7.4722],
        [0.051635, 0.000136, -0.001037, 0.006593, 0.007702],
        [-0.00024470, -0.00001149, 0.00000417, -0.00003169, -0.00005939],
    ]
)

# Doodson's s, h, p, N', p_s from l, l', F, D, Omega: s = F + Omega, h = s - D, p = s - l, N' = -Omega,
# p_s = h - l'.
_DOODSON_FROM_FUNDAMENTAL = np.array(
    [
        [0, 0, 1, 0, 1],
        [0, 0, 1, -1, 1],
        [-1, 0, 1, 0, 1],
        [0, 0, 0, 0, -1],
        [0, -1, 1, -1, 1],
    ],
    dtype=np.float64,
)
_SLOW = _FUNDAMENTAL @ _DOODSON_FROM_FUNDAMENTAL.T * _ARCSECOND

# Earth rotation angle in turns of UT1 days since 2000-01-01 12:00, and mean sidereal time less that angle.
_ROTATION_AT_EPOCH, _ROTATION_EXCESS_PER_DAY = 0.7790572732640, 0.00273781191135448
_SIDEREAL = np.array([0.014506, 4612.156534, 1.3915817, -0.00000044, -0.000029956, -0.0000000368])
_SIDEREAL *= _ARCSECOND


def mean_longitudes_rad(t_h: ArrayLike) -> NDArray[np.float64]:
    """Mean longitudes tau, s, h, p, N' and p_s.

    Parameters
    ----------
    t_h : array-like, shape (n,)
        Times. [UTC hours since 2000-01-01 00:00]

    Returns
    -------
    ndarray, shape (n, 6)
        Local mean lunar time tau at Greenwich, the mean longitudes s of the Moon, h of the Sun and p of the
        lunar perigee, N' (the node's, reversed) and p_s of the solar perigee. Not wrapped. [radians]

    Notes
    -----
    ``tau = GMST - s - 180 degrees``: mean sidereal time, which counts true precession, in place of ``15 t + h``
    removes about 0.01 degrees of spurious M2 lag. UTC stands for UT1, which is within 0.9 s of it.
    """
    times = np.asarray(t_h, dtype=np.float64)
    centuries = julian_centuries_tt(times)
    slow = slow_longitudes_rad(centuries)
    days = (times - 12.0) / 24.0
    rotation = 2 * np.pi * (_ROTATION_AT_EPOCH + days + _ROTATION_EXCESS_PER_DAY * days)
    sidereal = rotation + polynomial.polyval(centuries, _SIDEREAL)
    return np.column_stack([sidereal - slow[:, 0] - np.pi, slow])


def slow_longitudes_rad(centuries_tt: ArrayLike) -> NDArray[np.float64]:
    """Mean longitudes s, h, p, N' and p_s, which need no clock on Earth.

    Parameters
    ----------
    centuries_tt : array-like, shape (n,)
        Terrestrial Time. [Julian centuries since J2000.0]

    Returns
    -------
    ndarray, shape (n, 5)
        Not wrapped. [radians]
    """
    return np.asarray(polynomial.polyval(np.asarray(centuries_tt, dtype=np.float64), _SLOW).T)


def rates_deg_per_h() -> NDArray[np.float64]:
    """Rates of tau, s, h, p, N' and p_s at J2000.

    Returns
    -------
    ndarray, shape (6,)
        Rates. [degrees per hour]
    """
    slow = np.rad2deg(_SLOW[1]) / _HOURS_PER_CENTURY
    sidereal = 15.0 * (1.0 + _ROTATION_EXCESS_PER_DAY) + np.rad2deg(_SIDEREAL[1]) / _HOURS_PER_CENTURY
    return np.concatenate([[sidereal - slow[0]], slow])
