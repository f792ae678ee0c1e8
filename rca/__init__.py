"""Root-cause reports for failed hydraulic pumps."""

__version__ = "0.1.0"
