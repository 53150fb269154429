"""Ideal gases: nine-coefficient polynomials of each species, mixtures with the entropy of mixing."""
