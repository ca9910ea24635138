"""Many refits of simulated observations, spread over processes and kept as they are done."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial

import numpy as np

from exptime.arrays import Floats
from exptime.information.model import Bounds
from exptime.information.precision import QUANTITIES, Experiment
from exptime.parallel import Workers
from exptime.progress import Progress
from exptime.study.profile import Setting
from exptime.study.refits import Observer, refit_one, summarise
from exptime.study.setting import sigma_of
from exptime.study.verify_records import Refit, Simulations

Ledger = dict[str, list[float]]
"""Refits done so far: label and number to [has converged, vector...]."""

Keep = Callable[[Ledger], None]

_BLOCK = 16


def simulate(
    count: int,
    seed: int,
    label: str,
    setting: Setting,
    experiment: Experiment,
    covariance: Floats,
    limits: Bounds,
    team: Workers,
    ledger: Ledger,
    keep: Keep | None,
    progress: Progress,
) -> Simulations:
    """Refit simulated observations of one geometry, in blocks that are kept as they are done.

    Parameters
    ----------
    count, seed : int
        Number of observations, and the seed that each has a child of.
    label : str
        Name of the geometry, for the ledger.
    setting, experiment, covariance
        As `exptime.study.setting.setting_of` gives them.
    limits : Bounds
        Where starts may lie.
    team : Workers
        Processes.
    ledger : dict
        Refits done before; added to.
    keep : callable or None
        Called with the ledger after every block.
    progress : Progress
        Told how many refits are done.
    """
    free = experiment.is_free
    full = np.zeros((len(free), len(free)))
    full[np.ix_(free, free)] = covariance
    seeds = np.random.SeedSequence((seed, 7)).spawn(count)
    observer = Observer(setting=setting, covariance=full, seeds=tuple(seeds), bounds=limits)
    missing = [n for n in range(count) if f"{label}:{n}" not in ledger]
    finished = count - len(missing)
    for first in range(0, len(missing), _BLOCK):
        block = missing[first : first + _BLOCK]
        told = partial(_counted, progress, finished + first, count)
        results = team.map(partial(refit_one, observer), block, told)
        for number, (has_converged, vector) in zip(block, results, strict=True):
            ledger[f"{label}:{number}"] = [float(has_converged), *vector.tolist()]
        if keep is not None:
            keep(ledger)
    refits: list[Refit] = []
    for number in range(count):
        flag, *values = ledger[f"{label}:{number}"]
        refits.append((bool(flag), np.array(values)))
    bounds = np.array([sigma_of(experiment, covariance, quantity) for quantity in QUANTITIES])
    return summarise(observer, refits, bounds)


def _counted(progress: Progress, before: int, total: int, done: int, _: int) -> None:
    progress(before + done, total)
