"""Maxima of regions with proven upper bounds."""

from engine.certified.bounds import TOLERANCE, certified_maxima, certified_maximum

__all__ = ["TOLERANCE", "certified_maxima", "certified_maximum"]
