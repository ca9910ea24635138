"""Inversion of an information matrix that is nearly, or truly, singular."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from exptime.arrays import Floats

_SINGULAR = 1e-12
_PARTICIPATES = 1e-5


@dataclass(frozen=True, slots=True, kw_only=True)
class Inverse:
    """The inverse of a symmetric matrix by its scaled eigenvectors.

    Parameters
    ----------
    scale : ndarray, shape (n,)
        Root of the diagonal; one where the diagonal is zero.
    values, vectors : ndarray, shapes (n,), (n, n)
        Eigenvalues, increasing, and eigenvectors of the matrix scaled to unit diagonal.
    """

    scale: Floats
    values: Floats
    vectors: Floats

    @property
    def condition(self) -> float:
        """Condition number of the scaled matrix; infinite when singular."""
        smallest = float(self.values[0])
        largest = float(self.values[-1])
        return largest / smallest if smallest > _SINGULAR * largest else float("inf")

    def covariance(self, directions: Floats) -> Floats:
        """Covariance of linear combinations of the parameters.

        Parameters
        ----------
        directions : ndarray, shape (m, n)
            Each row is a combination.

        Returns
        -------
        ndarray, shape (m, m)
            Rows and columns of combinations that the matrix leaves unconstrained are infinite.

        Notes
        -----
        A combination counts as unconstrained when more than 1e-5 of it, in scaled units, lies
        along eigenvectors whose eigenvalue is below 1e-12 of the largest.
        """
        scaled = np.asarray(directions) / self.scale
        along = scaled @ self.vectors
        sound = self.values > _SINGULAR * max(float(self.values[-1]), 0.0)
        lost = np.linalg.norm(along[:, ~sound], axis=1)
        unconstrained = lost > _PARTICIPATES * np.linalg.norm(scaled, axis=1)
        kept = along[:, sound]
        result = (kept / self.values[sound]) @ kept.T
        result[unconstrained, :] = np.inf
        result[:, unconstrained] = np.inf
        return np.asarray(result)


def invert(information: Floats) -> Inverse:
    """Prepare the inverse of an information matrix.

    Parameters
    ----------
    information : ndarray, shape (n, n)
        Symmetric, not negative.
    """
    diagonal = np.diagonal(information)
    scale = np.sqrt(np.where(diagonal > 0.0, diagonal, 1.0))
    scaled = information / np.outer(scale, scale)
    values, vectors = np.linalg.eigh(0.5 * (scaled + scaled.T))
    return Inverse(scale=scale, values=values, vectors=vectors)
