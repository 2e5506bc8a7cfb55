"""Normal equations of mean, regressors and constituents in real parameters, and their solution.

Parameters are the coefficients of the q regressors, then for each fitted constituent the real and the imaginary
part of its phasor ``P = H exp(-iG)``: the model is ``R x + Re sum c_k P_k``.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import scipy.linalg
from numpy.typing import NDArray

from tidekit.errors import AnalysisError
from tidekit.harmonic.basis import Basis, Complex, Float

_SINGULAR = 1e-13
"""Reciprocal condition number of the scaled normal matrix below which columns cannot be told apart."""


@dataclass(frozen=True, eq=False)
class Model:
    """A basis with constituents tied to others, and regressors beside it; p = q + 2k parameters."""

    basis: Basis
    """Carriers of all constituents, the inferred ones among them."""
    tie: Complex
    """Phasors of all constituents from those of the k fitted ones, shape (all, k)."""
    regressors: Float
    """Columns that are not constituents, the mean's ones first, shape (n, q)."""

    def project(self, series: Float) -> Float:
        """Transposed design matrix times a series of shape (n,); shape (p,)."""
        tied = self.tie.conj().T @ self.basis.project(series[:, None])[:, 0]
        # Re(c P) = Re c Re P - Im c Im P, and conj(c) y sums Re c y - i Im c y.
        return np.concatenate([self.regressors.T @ series, tied.real, tied.imag])

    def evaluate(self, parameters: Float) -> Float:
        """Design matrix times parameters: the model at the samples, shape (n,)."""
        q = self.regressors.shape[1]
        real, imaginary = np.split(parameters[q:], 2)
        return self.regressors @ parameters[:q] + self.basis.evaluate(self.tie @ (real + 1j * imaginary))

    def normal_matrix(self) -> Float:
        """Transposed design matrix times itself, shape (p, p)."""
        hermitian, symmetric = self.basis.gram()
        hermitian = self.tie.conj().T @ hermitian @ self.tie
        symmetric = self.tie.T @ symmetric @ self.tie
        across = self.tie.conj().T @ self.basis.project(self.regressors)
        q, k = self.regressors.shape[1], self.tie.shape[1]
        matrix = np.empty((q + 2 * k, q + 2 * k))
        matrix[:q, :q] = self.regressors.T @ self.regressors
        matrix[q:, :q] = np.vstack([across.real, across.imag])
        matrix[:q, q:] = matrix[q:, :q].T
        real, imaginary = slice(q, q + k), slice(q + k, q + 2 * k)
        matrix[real, real] = 0.5 * (hermitian + symmetric).real
        matrix[imaginary, imaginary] = 0.5 * (hermitian - symmetric).real
        matrix[real, imaginary] = -0.5 * (hermitian + symmetric).imag
        matrix[imaginary, real] = matrix[real, imaginary].T
        return matrix


@dataclass(frozen=True, eq=False)
class Factor:
    """A factored normal matrix."""

    scale: Float
    """Square roots of its diagonal, shape (p,)."""
    cholesky: NDArray[np.float64]
    """Lower Cholesky factor of the matrix scaled to a unit diagonal."""
    scaled: Float
    """That scaled matrix: the correlations between columns."""

    @classmethod
    def of(cls, matrix: Float, close_pairs: Sequence[tuple[str, str, float]] = ()) -> Factor:
        """Factor a normal matrix; `close_pairs` are the constituents to blame if it is singular.

        Raises
        ------
        AnalysisError
            If its columns cannot be told apart.
        """
        scale = np.sqrt(np.diag(matrix))
        if not np.all(scale > 0):
            message = "a column of the model is zero at every sample; leave out that constituent or regressor"
            raise AnalysisError(message)
        scaled = matrix / np.outer(scale, scale)
        lowest, highest = scipy.linalg.eigvalsh(scaled)[[0, -1]]
        if lowest < _SINGULAR * highest:
            blame = ", ".join(f"{first} and {second}" for first, second, _ in close_pairs) or "some columns"
            message = f"the record cannot tell {blame} apart; ask for fewer constituents, or infer the close ones"
            raise AnalysisError(message)
        return cls(scale, np.linalg.cholesky(scaled), scaled)

    def solve(self, right: Float) -> Float:
        """Solve for parameters, shape (p,) or (p, r)."""
        scale = self.scale if right.ndim == 1 else self.scale[:, None]
        return np.asarray(scipy.linalg.cho_solve((self.cholesky, True), right / scale) / scale)

    def inverse(self) -> Float:
        """Inverse of the normal matrix, shape (p, p)."""
        return self.solve(np.eye(len(self.scale)))

    @property
    def condition_number(self) -> float:
        """Condition number of the design matrix with its columns scaled to length one."""
        eigenvalues = scipy.linalg.eigvalsh(self.scaled)
        return float(np.sqrt(eigenvalues[-1] / eigenvalues[0]))
