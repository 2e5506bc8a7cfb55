"""Normal equations in real parameters, and their solution.

Parameters are the mean level, the trend, then for each fitted constituent the real and the imaginary part of its
phasor ``P = H exp(-iG)``, then the coefficients of regressors.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from tidekit.errors import AnalysisError
from tidekit.harmonic.basis import Basis
from tidekit.harmonic.columns import Complex, Float

_LEAST_DISTANCE = 1e-10
"""Squared distance of a unit column from the space of the others below which they cannot be told apart: its
coefficient would lose five digits to its neighbours, and the noise grow a hundred thousand times."""


def mixing_matrix(tie: Complex, flat: int) -> Float:
    """Matrix from the parameters to the complex columns' real and imaginary parts, which stand in turn.

    Parameters
    ----------
    tie : ndarray of complex, shape (all, k)
        Phasors of all constituents from those of the k fitted ones.
    flat : int
        Number of real columns (mean level, trend) before the constituents'.

    Returns
    -------
    ndarray, shape (2 (flat + all), flat + 2 k)
        A design row is the column's parts times this: ``Re(c P) = Re c Re P - Im c Im P``.
    """
    rows, fitted = tie.shape
    matrix = np.zeros((2 * (flat + rows), flat + 2 * fitted))
    matrix[np.arange(0, 2 * flat, 2), np.arange(flat)] = 1.0
    real, imaginary = matrix[2 * flat :: 2], matrix[2 * flat + 1 :: 2]
    real[:, flat : flat + fitted], real[:, flat + fitted :] = tie.real, -tie.imag
    imaginary[:, flat : flat + fitted], imaginary[:, flat + fitted :] = -tie.imag, -tie.real
    return matrix


@dataclass(frozen=True, eq=False)
class Model:
    """Complex columns mixed into real ones, and regressors beside them; p parameters in all."""

    basis: Basis
    """The complex columns at the samples."""
    mixing: Float
    """Real design columns from the complex columns' parts, of `mixing_matrix`."""
    regressors: Float
    """Further columns, shape (n, q)."""

    def project(self, series: Float) -> Float:
        """Transposed design matrix times a series of shape (n,); shape (p,)."""
        parts = self.basis.project(series).view(np.float64)
        return np.concatenate([parts @ self.mixing, series @ self.regressors])

    def evaluate(self, parameters: Float) -> Float:
        """Design matrix times parameters: the model at the samples, shape (n,)."""
        own = self.mixing.shape[1]
        result = self.basis.evaluate((self.mixing @ parameters[:own]).view(np.complex128).conj())
        if self.regressors.size:
            result += self.regressors @ parameters[own:]
        return result

    def normal_matrix(self) -> Float:
        """Transposed design matrix times itself, shape (p, p)."""
        own, extra = self.mixing.shape[1], self.regressors.shape[1]
        matrix = np.empty((own + extra, own + extra))
        matrix[:own, :own] = self.mixing.T @ self.basis.gram() @ self.mixing
        for column in range(extra):
            matrix[:, own + column] = self.project(self.regressors[:, column])
        matrix[own:, :own] = matrix[:own, own:].T
        return matrix


@dataclass(frozen=True, eq=False)
class Inverse:
    """An inverted normal matrix."""

    matrix: Float
    """The normal matrix, shape (p, p)."""
    inverse: Float
    """Its inverse."""

    @classmethod
    def of(cls, matrix: Float, names: Sequence[str]) -> Inverse:
        """Invert a normal matrix whose parameters have these names.

        Raises
        ------
        AnalysisError
            If its columns cannot be told apart; names those that cannot.
        """
        scale = np.sqrt(np.diag(matrix))
        if not np.all(scale > 0.0):
            empty = ", ".join(
                dict.fromkeys(name.split()[0] for name, size in zip(names, scale, strict=True) if not size)
            )
            message = f"{empty} is zero at every sample; leave it out"
            raise AnalysisError(message)
        scaled = matrix / np.outer(scale, scale)
        try:
            np.linalg.cholesky(scaled)
            inverse = np.linalg.inv(scaled)
            distance = float(1.0 / np.diag(inverse).max())
        except np.linalg.LinAlgError:
            distance = 0.0
        if not distance > _LEAST_DISTANCE:
            raise AnalysisError(_inseparable(scaled, names))
        return cls(matrix, inverse / np.outer(scale, scale))

    def solve(self, right: Float) -> Float:
        """Solve for parameters, shape (p,), with one refinement."""
        first = self.inverse @ right
        return np.asarray(first + self.inverse @ (right - self.matrix @ first))

    @property
    def scaled(self) -> Float:
        """The normal matrix scaled to a unit diagonal: correlations between the design's columns."""
        scale = np.sqrt(np.diag(self.matrix))
        return np.asarray(self.matrix / np.outer(scale, scale))


def _inseparable(scaled: Float, names: Sequence[str]) -> str:
    """Message that names the parameters which make up the direction that the record does not see."""
    _, vectors = np.linalg.eigh(scaled)
    weight = vectors[:, 0] ** 2
    order = [int(index) for index in np.argsort(-weight) if weight[index] > 0.02]
    blame = list(dict.fromkeys(names[index].split()[0] for index in order))[:6]
    return (
        f"the record cannot tell {' and '.join(blame)} apart; ask for fewer of them, infer the close ones, "
        "or take a longer record"
    )
