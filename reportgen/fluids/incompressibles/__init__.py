"""Incompressible liquids and solids: density and heat capacity as their user states them."""
