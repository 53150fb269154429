"""Gases that react: equilibrium by least Gibbs energy, and what any mixture of streams makes when it burns."""
