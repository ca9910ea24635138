"""The result of a verification as the public face hands it out."""

from __future__ import annotations

from dataclasses import dataclass

from exptime.information.precision import Quantity
from exptime.study.verdict import overall
from exptime.study.verify_records import Verdict, Verification


@dataclass(frozen=True, slots=True)
class VerificationResult:
    """Whether the bound of a forecast holds.

    Parameters
    ----------
    record : Verification
        Everything, in plain numbers.
    """

    record: Verification

    @property
    def verdict(self) -> Verdict:
        """``holds``, ``optimistic``, ``pessimistic``, ``multimodal`` or ``prior-limited``.

        The gravest of the geometries that were verified.
        """
        return overall([geometry.verdict for geometry in self.record.geometries])

    @property
    def sentence(self) -> str:
        """The verdict in words."""
        from exptime.report.proof import verdict_sentence

        return verdict_sentence(self.record)

    def ratios(self, quantity: Quantity) -> dict[str, float]:
        """Return half-widths of the profile's 68 per cent interval over the bound.

        Parameters
        ----------
        quantity : {"mass", "radius", "compactness"}
            Which quantity.

        Returns
        -------
        dict
            Name of each geometry to its ratio; infinite where the profile stays open. A
            quantity that is held fixed has none.
        """
        return {
            geometry.label: profile.ratio
            for geometry in self.record.geometries
            for profile in geometry.profiles
            if profile.quantity == quantity
        }

    def to_text(self, width: int = 80) -> str:
        """Return the report as text of at most so many columns."""
        from exptime.report.proof_text import verification_text

        return verification_text(self.record, width)

    def to_json(self) -> str:
        """Return the numbers as a JSON document."""
        from exptime.report.numbers import to_json
        from exptime.report.proof_document import verification_document

        return to_json(verification_document(self.record))

    def to_html(self) -> str:
        """Return the report as one self-contained page."""
        from exptime.report.proof_page import verification_page

        return verification_page(self.record)

    def __str__(self) -> str:
        """Return the report as text of 80 columns."""
        return self.to_text()

    def _repr_html_(self) -> str:
        from exptime.report.proof_page import verification_html_fragment

        return verification_html_fragment(self.record)
