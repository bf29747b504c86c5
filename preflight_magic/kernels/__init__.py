"""Numbers only: arrays in, arrays and small frozen results out."""
