"""Background rates in channels."""

from __future__ import annotations

import itertools
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad

from exptime.instrument.background import power_law_rates
from exptime.instrument.reader import read_instrument
from exptime.instrument.records import Instrument
from tests.instrument.conftest import write

Bench = Callable[..., Instrument]


@given(st.floats(0.0, 1e4), st.floats(-10.0, 10.0), st.integers(1, 300))
def test_power_law_sums_to_its_rate(rate: float, index: float, count: int) -> None:
    """Over the channels' band, for any index."""
    edges = np.linspace(0.3, 8.0, count + 1)
    rates = power_law_rates(rate, index, edges)
    assert rates.shape == (count,)
    assert (rates >= 0.0).all()
    assert rates.sum() == pytest.approx(rate, rel=1e-12)


@pytest.mark.parametrize("index", [-2.0, 0.0, 0.7, 1.0, 1.0 + 1e-12, 1.0 - 1e-7, 2.0, 9.5])
def test_power_law_is_shared_as_its_integral(index: float) -> None:
    """Against quadrature, through g = 1; the area has no part in it."""
    edges = np.array([0.3, 0.5, 0.55, 1.7, 4.0, 10.0])
    slow = np.array(
        [
            quad(lambda e: e**-index, a, b, epsabs=0.0, epsrel=1e-12)[0]
            for a, b in itertools.pairwise(edges)
        ]
    )
    rates = power_law_rates(3.0, index, edges)
    np.testing.assert_allclose(rates, 3.0 * slow / slow.sum(), rtol=1e-11)


@pytest.mark.parametrize("area", ["0.2,10\n8,10\n", "0.2,1\n1,900\n8,10\n"])
def test_background_does_not_know_the_area(bench: Bench, area: str) -> None:
    """The same counts behind any mirror."""
    found = bench(area=area, background="{rate: 2 s-1, photon_index: 1}")
    edges = found.channel_edges_kev
    share = np.log(edges[1:] / edges[:-1]) / np.log(edges[-1] / edges[0])
    np.testing.assert_allclose(found.background_per_s, 2.0 * share, rtol=1e-12)


@pytest.mark.parametrize(
    "rate", ["0.4 s-1", "0.4 ct s-1", "0.4 ct/s", "24 min-1", "400 / ks", "0.4 Hz"]
)
def test_rate_is_taken_in_any_unit(bench: Bench, rate: str) -> None:
    """Counts per second, or just per second."""
    found = bench(background=f"{{rate: {rate}, photon_index: 0.7}}")
    assert found.background_per_s.sum() == pytest.approx(0.4, rel=1e-12)


TABLES = {
    "plain": "0.1 1.0\n1.3 3.4\n9.3 0.2\n",
    "csv": "energy (keV), rate (ct / (s keV))\n0.1, 1.0\n1.3, 3.4\n9.3, 0.2\n",
    "per second and electronvolt": "energy (eV), rate (1 / (s eV))\n"
    "100, 0.001\n1300, 0.0034\n9300, 0.0002\n",
    "ecsv": "# %ECSV 1.0\n# ---\n# datatype:\n"
    "# - {name: energy, unit: keV, datatype: float64}\n"
    "# - {name: rate, unit: ct / (ks keV), datatype: float64}\n# schema: astropy-2.0\n"
    "energy rate\n0.1 1000\n1.3 3400\n9.3 200\n",
}


@pytest.mark.parametrize("form", TABLES)
def test_table_is_integrated_over_every_channel(tmp_path: Path, form: str) -> None:
    """Straight lines between its rows: a closed form in each channel."""
    folder = write(tmp_path, {"background": "b.dat"})
    (folder / "b.dat").write_text(TABLES[form], encoding="utf-8")
    found = read_instrument(str(folder))
    edges = found.channel_edges_kev

    def primitive(e: float) -> float:
        if e < 1.3:
            return 0.8 * e + e**2  # 1 + 2 (e - 0.1)
        return 0.8 * 1.3 + 1.69 + 3.4 * (e - 1.3) - 0.2 * (e - 1.3) ** 2

    expected = np.diff([primitive(e) for e in edges])
    np.testing.assert_allclose(found.background_per_s, expected, rtol=1e-12)
    assert found.warnings == ()


def test_table_shorter_than_the_band_counts_as_zero_and_is_told(tmp_path: Path) -> None:
    """No line is carried on beyond the last row."""
    folder = write(tmp_path, {"background": "b.dat"})
    (folder / "b.dat").write_text("0.5 2\n1.0 2\n", encoding="utf-8")
    found = read_instrument(str(folder))
    assert found.background_per_s.sum() == pytest.approx(1.0, rel=1e-12)
    assert any("background covers 0.5 to 1 keV" in w for w in found.warnings)


def test_finer_channels_hold_the_same_counts(tmp_path: Path) -> None:
    """Counts belong to the band, not to its cutting."""
    totals = []
    for width in ("100 eV", "20 eV", "1 keV"):
        channels = f"{{band: 0.3-2.3 keV, width: {width}}}"
        folder = write(tmp_path, {"background": "b.dat", "channels": channels})
        (folder / "b.dat").write_text(TABLES["plain"], encoding="utf-8")
        totals.append(read_instrument(str(folder)).background_per_s.sum())
    np.testing.assert_allclose(totals, totals[0], rtol=1e-12)
