"""Effective area from text and FITS: the same area whatever the form it comes in."""

from __future__ import annotations

import gzip
import itertools
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from astropy.io import fits
from hypothesis import given
from hypothesis import strategies as st

from exptime.instrument.curves import integrate_linear
from exptime.instrument.reader import read_instrument
from exptime.instrument.records import Instrument
from exptime.instrument.response import area_cm2
from tests.instrument.conftest import write

Bench = Callable[..., Instrument]
POINTS = ((0.2, 100.0), (1.0, 900.0), (2.5, 400.0), (8.0, 20.0))
EDGES = np.array([0.2, 0.5, 1.1, 2.4, 6.0])
AREAS = np.array([150.0, 700.0, 900.0, 60.0])

SAME_POINTS = {
    "plain": "0.2 100\n1.0 900\n2.5 400\n8.0 20\n",
    "comments": "# made by hand\n0.2 100\n\n1.0 900\n# more\n2.5 400\n8.0 20\n",
    "csv": "energy,area\n0.2,100\n1,900\n2.5,400\n8,20\n",
    "semicolons": "energy;area\n0.2;100\n1;900\n2.5;400\n8;20\n",
    "swapped": "area,energy\n100,0.2\n900,1\n400,2.5\n20,8\n",
    "electronvolts": "energy (eV), area (m2)\n200,0.01\n1000,0.09\n2500,0.04\n8000,0.002\n",
    "suffixes": "energy_eV,effective_area_cm2\n200,100\n1000,900\n2500,400\n8000,20\n",
    "more columns": "energy,error,area\n0.2,5,100\n1,5,900\n2.5,5,400\n8,5,20\n",
    "ecsv": "# %ECSV 1.0\n# ---\n# datatype:\n# - {name: energy, unit: eV, datatype: float64}\n"
    "# - {name: area, unit: mm2, datatype: float64}\n# schema: astropy-2.0\n"
    "energy area\n200 10000\n1000 90000\n2500 40000\n8000 2000\n",
    "windows": "\ufeffenergy,area\r\n0.2,100\r\n1,900\r\n2.5,400\r\n8,20\r\n",
}


def arf(
    low: np.ndarray,
    high: np.ndarray,
    area: np.ndarray,
    *,
    form: str = "E",
    energy_unit: str | None = "keV",
    area_unit: str | None = "cm**2",
    name: str = "SPECRESP",
) -> fits.HDUList:
    """Return an effective-area file as the standard lays it out (CAL/GEN/92-002)."""
    columns = [
        fits.Column("ENERG_LO", form, unit=energy_unit, array=low),
        fits.Column("ENERG_HI", form, unit=energy_unit, array=high),
        fits.Column("SPECRESP", form, unit=area_unit, array=area),
    ]
    table = fits.BinTableHDU.from_columns(columns, name=name)
    table.header["HDUCLASS"] = "OGIP"
    table.header["HDUCLAS1"] = "RESPONSE"
    table.header["HDUCLAS2"] = "SPECRESP"
    return fits.HDUList([fits.PrimaryHDU(), table])


def read_arf(folder: Path, hdus: fits.HDUList, name: str = "bench.arf") -> Instrument:
    """Return the bench with this effective area."""
    write(folder, {"effective_area": name})
    hdus.writeto(folder / name)
    return read_instrument(str(folder))


def step(energies: np.ndarray) -> np.ndarray:
    """Return the area of the bins by a loop."""
    found = np.zeros(len(energies))
    for low, high, area in zip(EDGES[:-1], EDGES[1:], AREAS, strict=True):
        found[(energies > low) & (energies < high)] = area
    return found


@pytest.mark.parametrize("form", SAME_POINTS)
def test_points_are_joined_by_straight_lines(bench: Bench, form: str) -> None:
    """Two columns are points; every spelling gives the same area."""
    area = bench(area=SAME_POINTS[form]).area
    np.testing.assert_allclose(area.energies_kev, [e for e, _ in POINTS], rtol=1e-14)
    np.testing.assert_allclose(area.area_cm2, [a for _, a in POINTS], rtol=1e-14)
    assert area.source.startswith("points, linear between them")
    between = area_cm2(area, np.array([0.6, 1.75, 4.0]))
    np.testing.assert_allclose(between, [500.0, 650.0, 400.0 - 380.0 * 1.5 / 5.5], rtol=1e-13)


def test_outside_its_table_the_area_is_zero(bench: Bench) -> None:
    """Nothing is carried on; the ends themselves count."""
    area = bench().area
    found = area_cm2(area, np.array([0.1, 0.19999, 0.2, 8.0, 8.0001, 50.0]))
    np.testing.assert_array_equal(found, [0.0, 0.0, 100.0, 20.0, 0.0, 0.0])


@pytest.mark.parametrize("names", ["energy_low,energy_high,area", "E_MIN,E_MAX,specresp"])
def test_bins_are_steps(bench: Bench, names: str) -> None:
    """Three columns named as bounds and area: one value in each bin."""
    rows = "".join(
        f"{a!r},{b!r},{c!r}\n"
        for a, b, c in zip(EDGES[:-1].tolist(), EDGES[1:].tolist(), AREAS.tolist(), strict=True)
    )
    area = bench(area=f"{names}\n{rows}").area
    energies = np.linspace(0.15, 7.0, 1372)
    np.testing.assert_allclose(area_cm2(area, energies), step(energies), rtol=1e-14)
    assert area.source.startswith("bins, one area in each")


@pytest.mark.parametrize(
    ("options", "factors"),
    [
        ({}, (1.0, 1.0)),
        ({"form": "D"}, (1.0, 1.0)),
        ({"energy_unit": "eV"}, (1e3, 1.0)),
        ({"area_unit": "m2"}, (1.0, 1e-4)),
        ({"area_unit": "m**2", "energy_unit": "J"}, (1.602176634e-16, 1e-4)),
        ({"energy_unit": None, "area_unit": None}, (1.0, 1.0)),
        ({"name": "AREA"}, (1.0, 1.0)),
    ],
)
def test_arf_is_steps_in_its_own_units(
    tmp_path: Path, options: dict[str, str | None], factors: tuple[float, float]
) -> None:
    """Big-endian columns of four or eight bytes; single precision keeps seven digits."""
    energy, area = factors
    hdus = arf(EDGES[:-1] * energy, EDGES[1:] * energy, AREAS * area, **options)  # type: ignore[arg-type]
    found = read_arf(tmp_path, hdus)
    energies = np.linspace(0.15, 7.0, 1372)
    np.testing.assert_allclose(area_cm2(found.area, energies), step(energies), rtol=3e-7)
    assert found.warnings == ()
    assert found.area.area_cm2.dtype == np.dtype("=f8")


def test_packed_arf_is_read(tmp_path: Path) -> None:
    """Whatever its name."""
    write(tmp_path, {"effective_area": "area.packed"})
    arf(EDGES[:-1], EDGES[1:], AREAS).writeto(tmp_path / "plain.arf")
    packed = gzip.compress((tmp_path / "plain.arf").read_bytes())
    (tmp_path / "area.packed").write_bytes(packed)
    found = read_instrument(str(tmp_path))
    np.testing.assert_allclose(found.area.area_cm2, np.repeat(AREAS, 2), rtol=1e-7)


def test_first_bin_at_zero_energy_is_lifted_and_told(tmp_path: Path) -> None:
    """Such files are about; a logarithm of the energy would fail."""
    low = np.concatenate([[0.0], EDGES[1:-1]])
    found = read_arf(tmp_path, arf(low, EDGES[1:], AREAS))
    assert found.area.energies_kev[0] == pytest.approx(5e-4)
    assert any("begins at zero energy" in warning for warning in found.warnings)


def test_joints_of_single_precision_are_closed(tmp_path: Path) -> None:
    """Bounds that differ by rounding meet; a true gap is refused (see test_broken_files)."""
    high = EDGES[1:] * (1.0 + 2e-7)
    found = read_arf(tmp_path, arf(EDGES[:-1], high, AREAS, form="D"))
    knots = found.area.energies_kev
    np.testing.assert_array_equal(knots[1:-1:2], knots[2:-1:2])


def test_thousands_of_rows_are_read(tmp_path: Path) -> None:
    """As real files have them."""
    edges = np.linspace(0.1, 12.0, 2381)
    found = read_arf(tmp_path, arf(edges[:-1], edges[1:], np.full(2380, 77.0)))
    assert len(found.area.energies_kev) == 4760
    assert area_cm2(found.area, np.array([3.3333]))[0] == 77.0


def by_loop(energies: np.ndarray, values: np.ndarray, low: float, high: float) -> float:
    """Integral of straight lines over one interval by trapezoids between all knots inside."""
    inside = [low, *(e for e in energies if low < e < high), high]
    inside = [e for e in inside if energies[0] <= e <= energies[-1]]
    if energies[0] > low and energies[0] < high:
        inside.append(energies[0])
    if energies[-1] > low and energies[-1] < high:
        inside.append(energies[-1])
    inside = sorted(set(inside))
    heights = [np.interp(e, energies, values) for e in inside]
    total = 0.0
    for k in range(len(inside) - 1):
        total += 0.5 * (heights[k] + heights[k + 1]) * (inside[k + 1] - inside[k])
    return total


@given(
    st.lists(st.integers(1, 400), min_size=2, max_size=12, unique=True),
    st.lists(st.integers(1, 400), min_size=2, max_size=9, unique=True),
    st.integers(0, 1000),
)
def test_integral_of_straight_lines_equals_its_twin(
    knots: list[int], bounds: list[int], seed: int
) -> None:
    """Channels inside, across and outside the table."""
    energies = np.array(sorted(knots)) / 37.0
    edges = np.array(sorted(bounds)) / 37.0
    values = np.random.default_rng(seed).uniform(0.0, 5.0, len(energies))
    slow = [by_loop(energies, values, a, b) for a, b in itertools.pairwise(edges)]
    fast = integrate_linear(energies, values, edges)
    np.testing.assert_allclose(fast, slow, rtol=1e-11, atol=1e-11)
