"""Property models: vectorised, SI units, mass basis."""
