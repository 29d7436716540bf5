"""Arrays in, frozen records of arrays out; NumPy and SciPy only."""
