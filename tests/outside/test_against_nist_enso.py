"""The solver against certified values: NIST StRD, ENSO, a mean and three waves in 168 monthly values.

NIST/ITL Statistical Reference Datasets, nonlinear regression, ENSO; certified values and data read (see the head of
nist_enso.csv). Its two fitted periods are held at their certified values, so that seven linear coefficients remain.
"""

from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray

from tidekit.harmonic.basis import Basis, basis_for
from tidekit.harmonic.columns import Columns
from tidekit.harmonic.grid import GridBasis
from tidekit.harmonic.normal import Inverse, Model, mixing_matrix
from tidekit.harmonic.scattered import ScatteredBasis

PERIODS = np.array([12.0, 44.311088700, 26.887614440])
CERTIFIED = np.array(
    [10.510749193, 3.0762128085, 0.53280138227, -1.6231428586, 0.52554493756, 0.21232288488, 1.4966870418]
)
"""b1, then the cosine and sine coefficients b2 b3, b5 b6, b8 b9."""
CERTIFIED_RESIDUAL_SD = 2.2269642403
CERTIFIED_FREEDOM = 159
DIGITS = 9.0
"""The bar; the certified values have 11 digits, and the held periods' rounding leaves 9.6 (both ways give 9.6)."""


def wave_columns() -> Columns:
    turn = np.concatenate([[0.0], 2 * np.pi / PERIODS])
    return Columns(turn, lambda t: np.exp(1j * np.outer(t, turn)))


@pytest.mark.parametrize("kind", [GridBasis, ScatteredBasis])
def test_seven_coefficients(kind: type[Basis]) -> None:
    months, pressure = np.loadtxt(Path(__file__).with_name("nist_enso.csv"), delimiter=",", skiprows=4).T
    columns = wave_columns()
    basis = basis_for(columns, months) if kind is GridBasis else ScatteredBasis.of(columns, months)
    assert isinstance(basis, kind)
    model = Model(basis, mixing_matrix(np.eye(3, dtype=np.complex128), 1), np.empty((len(months), 0)))
    names = ["b1", "b2", "b5", "b8", "b3", "b6", "b9"]
    parameters = Inverse.of(model.normal_matrix(), names).solve(model.project(pressure))
    # Re(exp(i w t)(x + iy)) = x cos(w t) - y sin(w t)
    found = np.concatenate([parameters[:1], np.column_stack([parameters[1:4], -parameters[4:]]).ravel()])
    assert digits(found, CERTIFIED) >= DIGITS
    residual = pressure - model.evaluate(parameters)
    spread = np.sqrt(residual @ residual / CERTIFIED_FREEDOM)
    assert digits(spread, CERTIFIED_RESIDUAL_SD) >= DIGITS


def digits(found: NDArray[np.float64] | float, certified: NDArray[np.float64] | float) -> float:
    """Log relative error, the measure that NIST recommends."""
    return float(-np.log10(np.max(np.abs(np.asarray(found) / certified - 1.0))))
