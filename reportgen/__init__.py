"""Static site generator for reproducible entropy calculation reports."""

__version__ = "0.1.0"
