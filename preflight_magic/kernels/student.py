"""Student's t: probabilities and quantiles."""

from __future__ import annotations

import numpy as np
from scipy.special import stdtr, stdtrit

from preflight_magic.kernels.arma_parameters import Array


def student_cdf(values: Array, degrees: float) -> Array:
    """Probability of at most `values`, elementwise, with so many degrees of freedom."""
    return np.asarray(stdtr(degrees, values), dtype=float)


def student_quantile(probability: float, degrees: float) -> float:
    """Value that is not exceeded with this probability, with so many degrees of freedom."""
    return float(stdtrit(degrees, probability))
