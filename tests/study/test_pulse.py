"""Pulses and counts: the convention of longitude, rates, backgrounds and sums."""

from __future__ import annotations

import numpy as np
import pytest

from exptime.instrument.reader import read_instrument
from exptime.study.forecast import make_forecast
from exptime.study.geometries import Draws
from exptime.study.pulse import make_counts, make_pulse, with_phase_bins
from exptime.study.pulse_records import Counts, Pulse
from tests.study.cases import DRAWN, KNOWN, SPOT, draws_of, instrument_of, target_of


def pulse_of(phases: int = 64, energies: tuple[float, ...] = (1.0,), **changes: str) -> Pulse:
    """Return the pulse of the known target with keys changed."""
    target = target_of(KNOWN, **changes)
    return make_pulse(target, energies, phases, draws=Draws(), read_instrument=read_instrument)


def counts_of(exposure_s: float = 1e5, background: float = 0.1) -> Counts:
    """Return counts of the known target."""
    return make_counts(
        target_of(KNOWN),
        instrument_of(background),
        exposure_s,
        draws=Draws(),
        read_instrument=read_instrument,
    )


@pytest.mark.parametrize("longitude", [0.0, 90.0, 217.0])
def test_a_spot_at_longitude_l_peaks_near_phase_1_minus_l_over_360(longitude: float) -> None:
    """A slow star: no Doppler shift and little delay, within a bin of 64."""
    spot = SPOT.replace("longitude: 0 deg", f"longitude: {longitude} deg")
    found = pulse_of(hot_spots=f"[{spot}]", spin_frequency="1 Hz")
    peak = found.phase[np.argmax(found.photon_flux[:, 0])]
    offset = (peak - (1.0 - longitude / 360.0) + 0.5) % 1.0 - 0.5
    assert abs(offset) <= 1.0 / 64.0


def test_a_fast_spot_peaks_early() -> None:
    """Light that comes towards us is bluer and beamed: the peak moves ahead."""
    fast = pulse_of(256, spin_frequency="600 Hz")
    peak = fast.phase[np.argmax(fast.photon_flux[:, 0])]
    assert 0.8 < peak < 0.99


def test_phases_are_bin_centres_and_bins_average() -> None:
    """Coarse bins are means of fine ones, to 1e-6 of each energy's peak."""
    coarse, fine = pulse_of(8, (0.4, 2.0)), pulse_of(64, (0.4, 2.0))
    np.testing.assert_allclose(coarse.phase, (np.arange(8) + 0.5) / 8)
    assert coarse.photon_flux.shape == (8, 2)
    means = fine.photon_flux.reshape(8, 8, 2).mean(axis=1)
    peak = means.max(axis=0)
    np.testing.assert_allclose(coarse.photon_flux / peak, means / peak, rtol=0.0, atol=1e-6)


def test_the_pulse_knows_no_column() -> None:
    """It is the star's own, at the observer."""
    here, there = pulse_of(), pulse_of(column_density="5e21 cm-2")
    np.testing.assert_array_equal(here.photon_flux, there.photon_flux)


def test_counts_are_rates_times_exposure() -> None:
    """Against the forecast's expected data of the same geometry; twice the time, twice the counts.

    The forecast chooses its resolution as the counts do: equal to rounding.
    """
    counts, double = counts_of(), counts_of(2e5)
    forecast = make_forecast(
        target_of(KNOWN), instrument_of(), [1e5], read_instrument=read_instrument
    )
    expected = forecast.expected.source_per_s * 1e5 / 16.0
    np.testing.assert_allclose(counts.source_counts, expected, rtol=1e-9, atol=1e-9)
    np.testing.assert_allclose(double.source_counts, 2.0 * counts.source_counts, rtol=1e-12)
    assert counts.source_counts.sum() == pytest.approx(1e5 * forecast.source_per_s, rel=1e-9)


def test_the_background_is_the_same_in_every_phase_bin() -> None:
    """It sums to rate times exposure, and leaves the source alone."""
    counts, quiet = counts_of(), counts_of(background=0.0)
    assert counts.background_counts.shape == counts.source_counts.shape == (16, 27)
    assert counts.background_counts.sum() == pytest.approx(0.1 * 1e5)
    assert np.ptp(counts.background_counts, axis=0).max() == 0.0
    assert not quiet.background_counts.any()
    np.testing.assert_array_equal(counts.source_counts, quiet.source_counts)


def test_phase_bins_may_be_chosen() -> None:
    """The whole stays the same."""
    fine = make_counts(
        target_of(KNOWN),
        with_phase_bins(instrument_of(), 40),
        1e5,
        draws=Draws(),
        read_instrument=read_instrument,
    )
    assert fine.source_counts.shape == (40, 27)
    np.testing.assert_allclose(
        fine.source_counts.sum(axis=0), counts_of().source_counts.sum(axis=0), rtol=1e-5
    )


def test_a_disagreement_with_what_was_measured_is_noted() -> None:
    """As in a forecast: the hot spots stand, and the notes say so."""
    off = "{value: 0.05, uncertainty: 0.01, definition: rms, band: 0.5-2.0 keV}"
    assert any("The hot spots stand." in note for note in pulse_of(pulsed_fraction=off).notes)
    assert not any("The hot spots stand." in note for note in pulse_of().notes)


@pytest.mark.slow
def test_a_drawn_target_shows_its_median_geometry_and_says_so() -> None:
    """The counts are those of the forecast with the same draws."""
    target = target_of(DRAWN)
    counts = make_counts(
        target, instrument_of(), 1e6, draws=draws_of(8), read_instrument=read_instrument
    )
    assert any("median geometry" in note for note in counts.notes)
    assert any("effective geometries, fewer than 50" in note for note in counts.notes)
    forecast = make_forecast(
        target, instrument_of(), [1e6], draws=draws_of(8), read_instrument=read_instrument
    )
    assert counts.source_counts.sum() == pytest.approx(1e6 * forecast.source_per_s, rel=1e-6)
    assert len(set(counts.notes)) == len(counts.notes)
