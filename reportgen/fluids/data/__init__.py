"""Coefficients of published equations, one file a fluid, and the scripts that collected them."""
