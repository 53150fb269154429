"""Cubic equations of state: Peng-Robinson and Soave-Redlich-Kwong, pure and mixtures."""
