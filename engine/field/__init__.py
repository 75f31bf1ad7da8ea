"""Magnetic field of conductors in space: arrays in, arrays out, no layout."""

from engine.field.cache import ResponseCache
from engine.field.combined import WORST_OF_TWO, Combined, combined, worst_semi_major
from engine.field.many import Interpolated, interpolated_flux_density, pays
from engine.field.masks import inside, near_field, surface_distance
from engine.field.quantities import (
    Cycle,
    Ellipse,
    Peak,
    common_frequency,
    cycle,
    ellipse,
    peak,
    resultant,
)
from engine.field.sums import flux_density, responses, vector_potential

__all__ = [
    "WORST_OF_TWO",
    "Combined",
    "Cycle",
    "Ellipse",
    "Interpolated",
    "Peak",
    "ResponseCache",
    "combined",
    "common_frequency",
    "cycle",
    "ellipse",
    "flux_density",
    "inside",
    "interpolated_flux_density",
    "near_field",
    "pays",
    "peak",
    "responses",
    "resultant",
    "surface_distance",
    "vector_potential",
    "worst_semi_major",
]
