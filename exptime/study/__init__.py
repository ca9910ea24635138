"""Whole questions answered: from records of target and instrument to records of results."""
