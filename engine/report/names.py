"""How values of one report are written: its units, and the names of the items."""

from __future__ import annotations

from dataclasses import dataclass

from engine.layout import Layout
from engine.units import in_unit, significant, text_beside


@dataclass(frozen=True)
class Wording:
    """How values of one report are written: its units, and the names of the items."""

    unit: str
    length_unit: str
    names: dict[str, str]

    def name(self, item: str) -> str:
        """What a person calls the item."""
        return self.names.get(item, item)

    def value(self, tesla: float | None) -> str:
        """A flux density without its unit, three figures."""
        return "–" if tesla is None else significant(in_unit(tesla, self.unit))

    def small(self, tesla: float, whole: float) -> str:
        """A part of a whole, three figures; 0 where it is nothing beside the whole."""
        return "≈ 0" if 0 < tesla < 1e-5 * whole else self.value(tesla)

    def limit(self, tesla: float) -> str:
        """A level as it was typed: up to six figures, no zeros behind the point."""
        return f"{float(f'{in_unit(tesla, self.unit):.6g}'):.10g}"

    def derived(self, tesla: float) -> str:
        """A level at a frequency, by its formula: four figures."""
        return f"{float(f'{in_unit(tesla, self.unit):.4g}'):.10g}"

    def beside(self, tesla: float | None, limit: float | None) -> str:
        """A value with the figures that show its side of a limit."""
        if tesla is None or limit is None:
            return self.value(tesla)
        # Rounded to what was typed: 7.5 µT is 7.500000000000001 after conversion.
        typed = float(f"{in_unit(limit, self.unit):.12g}")
        return text_beside(in_unit(tesla, self.unit), typed)


def wording(layout: Layout, unit: str) -> Wording:
    """The wording of a layout's report in one unit."""
    names = {item.id: item.title for item in layout.items()}
    names.update({case.id: case.title for case in layout.cases})
    return Wording(unit, layout.settings.length_unit, names)
