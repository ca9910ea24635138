"""Hot-spot geometries that reproduce the measured flux and pulsed fraction."""
