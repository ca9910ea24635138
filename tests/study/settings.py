"""Likelihoods in closed form, to explore in place of a star's."""

from __future__ import annotations

from typing import cast

import numpy as np

from exptime.arrays import Floats
from exptime.information.model import Bounds, Model, Penalty
from exptime.study.profile import Setting
from exptime.study.refits import Observer
from tests.information.toys import TRUTH, Straight

ANYWHERE = Bounds(lower=np.full(2, -np.inf), upper=np.full(2, np.inf))


def setting_of_toy(
    model: Straight, prior_sigma: tuple[float, float] = (np.inf, np.inf),
    is_free: tuple[bool, bool] = (True, True),
) -> Setting:  # fmt: skip
    """Return a toy's likelihood about its truth, with these Gaussian priors."""
    return Setting(
        model=cast("Model", model),
        truth=TRUTH,
        penalty=Penalty(
            center=TRUTH,
            information=np.array([sigma**-2.0 for sigma in prior_sigma]),
            level_center=np.zeros(len(model.levels.prior_information)),
        ),
        is_free=np.array(is_free),
    )


def covariance_of(setting: Setting) -> Floats:
    """Return the inverse of information and priors; zero for fixed parameters."""
    matrix = cast("Straight", setting.model).information(TRUTH) + np.diag(
        setting.penalty.information
    )
    keep = np.ix_(setting.is_free, setting.is_free)
    full = np.zeros((2, 2))
    full[keep] = np.linalg.inv(matrix[keep])
    return full


def observer_of(setting: Setting, count: int) -> Observer:
    """Return what simulates so many observations of a toy."""
    return Observer(
        setting=setting,
        covariance=covariance_of(setting),
        seeds=tuple(np.random.SeedSequence(11).spawn(count)),
        bounds=ANYWHERE,
    )
