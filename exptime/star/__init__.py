"""The star: rays, figure, hot spots, emission and the harmonics of its pulse."""
