"""Fields of the entry strip: what each way of entering asks for, and what it means."""

from __future__ import annotations

#: Labels of the fields of each way of entering; an empty one is not used.
FIELDS: dict[str, tuple[str, str, str]] = {
    "to": ("x", "y", "z"),
    "by": ("dx", "dy", "dz"),
    "go": ("length", "toward", "up"),
    "size": ("along x", "along y", ""),
    "length": ("distance", "", ""),
}

#: Offered only while the tool asks for a bare length.
LENGTH = "length"

#: What each field means, for its tooltip.
MEANINGS = {
    "x": "Across, from the origin of the plan",
    "y": "Upwards on the plan, from the origin",
    "z": "Height above the datum; empty keeps the height",
    "dx": "Across, from the last place",
    "dy": "Upwards on the plan, from the last place",
    "dz": "Higher than the last place",
    "length": "Length on plan, from the last place",
    "toward": "Direction in degrees: 0 is +x, counter-clockwise",
    "up": "Higher than the last place",
    "distance": "Between the two points that were clicked",
    "along x": "Side along x; a negative one goes to the left",
    "along y": "Side along y; a negative one goes downwards",
}
