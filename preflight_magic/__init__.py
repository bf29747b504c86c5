"""Check series before forecasting: which transforms, why, and the pandas code that applies and undoes them."""

__version__ = "0.1.0"
