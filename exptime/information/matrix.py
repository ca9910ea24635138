"""Fisher information of folded counts, with the background levels eliminated in closed form.

Counts in phase bin k and channel c are Poisson with mean (T/n)(s[k, c] + b[c]) for n phase bins.
The information per second is

    A_ij = sum (1/n) ds_i ds_j / (s + b),

and a background level L with db[c] = w[c] dL enters with mixed terms G_iL and its own B_LL. At
exposure T the levels, known beforehand with variance v, leave

    F(T) = T A - sum_L (T G_iL)(T G_jL) / (T B_L + 1/v_L).

References
----------
Cramér 1946; Rao 1945; the elimination is the Schur complement of the block of levels.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from exptime.arrays import Floats
from exptime.instrument.records import BackgroundKnowledge

_BAND_KEV = 0.2


@dataclass(frozen=True, slots=True, kw_only=True)
class BackgroundLevels:
    """Free background levels.

    Parameters
    ----------
    shape_per_s : ndarray, shape (n_level, n_channel)
        Change of the background rate in each channel with the level; no two levels share a
        channel.
    prior_information : ndarray, shape (n_level,)
        1/variance of each level beforehand; zero when unknown.
    """

    shape_per_s: Floats
    prior_information: Floats


def background_levels(
    knowledge: BackgroundKnowledge, background_per_s: Floats, channel_edges_kev: Floats
) -> BackgroundLevels:
    """Return the levels that a knowledge of the background leaves free.

    Parameters
    ----------
    knowledge : BackgroundKnowledge
        What is known.
    background_per_s : ndarray, shape (n_channel,)
        Expected background, counts/s.
    channel_edges_kev : ndarray, shape (n_channel + 1,)
        keV; a fraction holds for levels of 0.2 keV counted from the first edge.
    """
    count = len(background_per_s)
    if knowledge.kind == "known" or (
        knowledge.kind in ("fraction", "scale") and knowledge.fraction == 0.0
    ):
        return BackgroundLevels(shape_per_s=np.empty((0, count)), prior_information=np.empty(0))
    if knowledge.kind == "unknown":
        return BackgroundLevels(shape_per_s=np.eye(count), prior_information=np.zeros(count))
    middle = 0.5 * (channel_edges_kev[1:] + channel_edges_kev[:-1]) - channel_edges_kev[0]
    band = np.zeros(count, int) if knowledge.kind == "scale" else (middle // _BAND_KEV).astype(int)
    members = np.unique(band)[:, None] == band
    shape = members * background_per_s
    filled = shape.any(axis=1)
    return BackgroundLevels(
        shape_per_s=shape[filled],
        prior_information=np.full(int(filled.sum()), knowledge.fraction**-2),
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class Information:
    """Information per second of exposure.

    Parameters
    ----------
    signal : ndarray, shape (n_parameter, n_parameter)
        A above.
    mixed : ndarray, shape (n_parameter, n_level)
        G above.
    level : ndarray, shape (n_level,)
        B above.
    level_prior : ndarray, shape (n_level,)
        1/v above; does not grow with exposure.
    """

    signal: Floats
    mixed: Floats
    level: Floats
    level_prior: Floats

    def at(self, exposures_s: Floats) -> Floats:
        """Return the information on the parameters alone.

        Parameters
        ----------
        exposures_s : ndarray, shape (n_exposure,)
            s.

        Returns
        -------
        ndarray, shape (n_exposure, n_parameter, n_parameter)
            F(T) above, without priors on the parameters.
        """
        time = np.asarray(exposures_s, float)[:, None]
        stiffness = time * self.level + self.level_prior
        share = np.divide(time**2, stiffness, out=np.zeros_like(stiffness), where=stiffness > 0.0)
        lost = np.einsum("il,tl,jl->tij", self.mixed, share, self.mixed)
        return np.asarray(time[:, :, None] * self.signal - lost)


def information_per_second(
    source_per_s: Floats,
    derivatives: Floats,
    background_per_s: Floats,
    levels: BackgroundLevels,
) -> Information:
    """Collect the information of one observation.

    Parameters
    ----------
    source_per_s : ndarray, shape (n_phase, n_channel)
        Expected source rate in each phase bin, counts/s.
    derivatives : ndarray, shape (n_parameter, n_phase, n_channel)
        Its derivatives.
    background_per_s : ndarray, shape (n_channel,)
        Expected background, counts/s.
    levels : BackgroundLevels
        What of it is free.
    """
    bins = source_per_s.shape[0]
    total = source_per_s + background_per_s
    weight = np.divide(1.0 / bins, total, out=np.zeros_like(total), where=total > 0.0)
    flat = (derivatives * np.sqrt(weight)).reshape(len(derivatives), -1)
    per_channel = np.einsum("ikc,kc->ic", derivatives, weight)
    return Information(
        signal=flat @ flat.T,
        mixed=per_channel @ levels.shape_per_s.T,
        level=levels.shape_per_s**2 @ weight.sum(axis=0),
        level_prior=levels.prior_information,
    )
