"""Effective area, redistribution, background and the profiles that name them."""
