"""The currents of a section in a load case, and what is left when they are added."""

from __future__ import annotations

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass

from engine.currents import CasePhasors, Component, load_current
from engine.formations import net_loads
from engine.runs import Section
from engine.typed_numbers import number_text
from engine.units import significant

#: A sum this small beside its terms is what rounding leaves.
_ROUNDING = 1e-12


@dataclass(frozen=True)
class SectionCurrents:
    """What flows through a section at one frequency, as far as it adds.

    Attributes
    ----------
    component : Component
        Frequency and what it adds with.
    terms : tuple of (circuit, label, complex)
        RMS phasor of each circuit conductor, along the route. [A]
    net : complex
        Their sum. [A]
    """

    component: Component
    terms: tuple[tuple[str, str, complex], ...]
    net: complex


def section_currents(
    phasors: CasePhasors, section: Section
) -> tuple[SectionCurrents, ...]:
    """The currents of a section by component, those without current left out."""
    loads = net_loads(section)
    each = [load_current(phasors, (load,)) for load in loads]
    found = []
    for place, component in enumerate(phasors.components):
        terms = tuple(
            (load.circuit, load.label, complex(current[place]))
            for load, current in zip(loads, each, strict=True)
            if current[place] != 0
        )
        if terms:
            net = sum((value for _, _, value in terms), 0j)
            if abs(net) < _ROUNDING * max(abs(value) for _, _, value in terms):
                net = 0j
            found.append(SectionCurrents(component, terms, net))
    return tuple(found)


def net_text(currents: Sequence[SectionCurrents], decimal: str = ".") -> str:
    """The net current in words: in all, and by frequency where there are several."""
    if not currents:
        return "No current flows here in this load case."
    left = [part for part in currents if part.net != 0]
    if len(currents) == 1:
        return f"Net current {_part_text(currents[0], decimal)}"
    if not left:
        return "Net current 0 A at every frequency"
    listed = "; ".join(_part_text(part, decimal) for part in left)
    frequencies = [part.component.frequency for part in left]
    if len(left) == 1:
        return f"Net current {listed}"
    if len(set(frequencies)) < len(frequencies) or 0.0 in frequencies:
        return f"Net current {listed} (these do not add as phasors)"
    whole = math.sqrt(math.fsum(abs(part.net) ** 2 for part in left))
    return f"Net current {_amperes(whole, decimal)} RMS in all: {listed}"


def phasor_text(value: complex, decimal: str = ".") -> str:
    """A phasor as RMS value and angle.

    Examples
    --------
    >>> phasor_text(3 + 3j), phasor_text(0j)
    ('4.24 A∠45°', '0 A')
    """
    if value == 0:
        return "0 A"
    angle = number_text(round(math.degrees(cmath.phase(value)), 1), decimal)
    return f"{_amperes(abs(value), decimal)}∠{angle.replace('-', '−')}°"


def _part_text(part: SectionCurrents, decimal: str) -> str:
    if part.component.frequency == 0:
        return f"{_amperes(part.net.real, decimal)} DC"
    hertz = number_text(part.component.frequency, decimal)
    return f"{phasor_text(part.net, decimal)} at {hertz} Hz"


def _amperes(value: float, decimal: str) -> str:
    return f"{significant(value).replace('.', decimal)} A"
