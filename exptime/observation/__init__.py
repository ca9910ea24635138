"""Star, column and instrument together: expected counts per phase bin and channel."""
