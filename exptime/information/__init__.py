"""Fisher information, priors, marginalisation and exposure for a precision."""
