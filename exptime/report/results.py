"""Results as the public face hands them out: quantities, and ways to show themselves."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from exptime.arrays import Floats
from exptime.information.precision import Quantity as QuantityName
from exptime.quantities import to_quantity
from exptime.study.pulse_records import Counts, Pulse
from exptime.study.records import Forecast, Spread

if TYPE_CHECKING:
    from astropy.units import Quantity

_UNITS = {"mass": "solMass", "radius": "km", "compactness": ""}


@dataclass(frozen=True, slots=True)
class ForecastResult:
    """Precision of mass and radius against exposure.

    Parameters
    ----------
    record : Forecast
        Everything, in plain numbers.
    """

    record: Forecast

    @property
    def exposures(self) -> Quantity:
        """Exposures, shape (n_exposure,)."""
        return to_quantity(self.record.exposures_s, "s")

    def data_sigma(self, quantity: QuantityName) -> dict[str, Quantity]:
        """One standard deviation from the data, without flat priors on mass and radius.

        Parameters
        ----------
        quantity : {"mass", "radius", "compactness"}
            Which quantity.

        Returns
        -------
        dict
            ``p16``, ``p50``, ``p84`` over geometries, each of shape (n_exposure,); infinite
            where unconstrained.
        """
        return _quantiles(self.record.curve(quantity).data_sigma, _UNITS[quantity])

    def sigma(self, quantity: QuantityName) -> dict[str, Quantity]:
        """One standard deviation with every prior; otherwise as `data_sigma`."""
        return _quantiles(self.record.curve(quantity).sigma, _UNITS[quantity])

    def required_exposures(self) -> list[dict[str, Quantity]]:
        """Quantiles of the required exposure for each goal, without margin."""
        return [_quantiles(goal.exposure_s, "s") for goal in self.record.goals]

    @property
    def headline(self) -> str:
        """The answer in one sentence."""
        from exptime.report.sentences import headline

        return headline(self.record)

    def to_text(self, width: int = 80) -> str:
        """Return the report as text of at most so many columns."""
        from exptime.report.text import forecast_text

        return forecast_text(self.record, width)

    def to_json(self) -> str:
        """Return the numbers as a JSON document."""
        from exptime.report.json_document import forecast_document, to_json

        return to_json(forecast_document(self.record))

    def to_html(self) -> str:
        """Return the report as one self-contained page."""
        from exptime.report.page import forecast_page

        return forecast_page(self.record)

    def __str__(self) -> str:
        """Return the report as text of 80 columns."""
        return self.to_text()

    def _repr_html_(self) -> str:
        from exptime.report.page import forecast_html_fragment

        return forecast_html_fragment(self.record)


@dataclass(frozen=True, slots=True)
class PulseResult:
    """Photon flux at the observer against phase and energy, without the column.

    Parameters
    ----------
    record : Pulse
        Everything, in plain numbers.
    """

    record: Pulse

    @property
    def phase(self) -> Floats:
        """Bin centres, 0 to 1, shape (n_phase,)."""
        return self.record.phase

    @property
    def energies(self) -> Quantity:
        """Photon energies, shape (n_energy,)."""
        return to_quantity(self.record.energies_kev, "keV")

    @property
    def photon_flux(self) -> Quantity:
        """Mean in each phase bin, shape (n_phase, n_energy)."""
        return to_quantity(self.record.photon_flux, "ph / (cm2 s keV)")

    def to_text(self, width: int = 80) -> str:
        """Return a table of at most so many columns."""
        from exptime.report.text import pulse_text

        return pulse_text(self.record, width)

    def to_json(self) -> str:
        """Return the numbers as a JSON document."""
        from exptime.report.json_document import pulse_document, to_json

        return to_json(pulse_document(self.record))

    def __str__(self) -> str:
        """Return a table of 80 columns."""
        return self.to_text()

    def _repr_html_(self) -> str:
        return _preformatted(self.to_text())


@dataclass(frozen=True, slots=True)
class CountsResult:
    """Expected counts of one exposure in phase bins and channels.

    Parameters
    ----------
    record : Counts
        Everything, in plain numbers.
    """

    record: Counts

    @property
    def phase(self) -> Floats:
        """Bin centres, 0 to 1, shape (n_phase,)."""
        return self.record.phase

    @property
    def channel_edges(self) -> Quantity:
        """Edges of the channels, shape (n_channel + 1,)."""
        return to_quantity(self.record.channel_edges_kev, "keV")

    @property
    def source_counts(self) -> Quantity:
        """Source counts, shape (n_phase, n_channel)."""
        return to_quantity(self.record.source_counts, "ct")

    @property
    def background_counts(self) -> Quantity:
        """Background counts, shape (n_phase, n_channel)."""
        return to_quantity(self.record.background_counts, "ct")

    def to_text(self, width: int = 80) -> str:
        """Return a table of at most so many columns."""
        from exptime.report.text import counts_text

        return counts_text(self.record, width)

    def to_json(self) -> str:
        """Return the numbers as a JSON document."""
        from exptime.report.json_document import counts_document, to_json

        return to_json(counts_document(self.record))

    def __str__(self) -> str:
        """Return a table of 80 columns."""
        return self.to_text()

    def _repr_html_(self) -> str:
        return _preformatted(self.to_text())


def _quantiles(spread: Spread, unit: str) -> dict[str, Quantity]:
    return {
        "p16": to_quantity(spread.p16, unit),
        "p50": to_quantity(spread.p50, unit),
        "p84": to_quantity(spread.p84, unit),
    }


def _preformatted(text: str) -> str:
    from html import escape

    return f"<pre>{escape(text)}</pre>"
