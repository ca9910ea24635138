"""Absorption on the way, and the relation of flux to normalisation."""
