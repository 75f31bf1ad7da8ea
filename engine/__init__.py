"""Lodestead without a screen: from a described room to an assessed room."""

__version__ = "0.1.0"
