"""What else was entered: documents, levels, zones, settings, and what is assumed."""

from __future__ import annotations

from reportlab.platypus import Flowable

from engine.assessment import zone_floor
from engine.criteria import LevelRanges, LevelTable, ReferenceLevel
from engine.field_words import field_words
from engine.items import Item
from engine.layout import Layout
from engine.origin_words import origin_text, told_origin
from engine.origins import assumptions
from engine.places import BackingDrawing, Enclosure, Room, Zone
from engine.report.drawings import receptor_marks
from engine.report.text import fact_table, paragraph, table
from engine.report.wording import NO_LEVELS
from engine.report.words import length, place, uncertainty_text
from engine.typed_numbers import number_text
from engine.units import flux_density_text


def documents(layout: Layout, width: float) -> list[Flowable]:
    """The register of source documents and backing drawings."""
    made: list[Flowable] = []
    if layout.documents:
        rows = [
            (
                d.title,
                d.file_name or "not stated",
                d.revision or "not stated",
                d.date or "not stated",
                d.sha256 or "not stated",
                d.note,
            )
            for d in layout.documents
        ]
        heads = ("Document", "File", "Revision", "Date", "SHA-256 of the file", "Note")
        made.append(table(heads, rows, (22, 16, 9, 12, 25, 16), width))
    else:
        made.append(paragraph("No source document was entered."))
    if not layout.backing_drawings:
        return made
    unit = layout.settings.length_unit
    drawings = [
        (
            d.title,
            f"{d.file_name or 'not stated'}, page {d.page}\n{_kept(d)}",
            d.sha256 or "not stated",
            d.view,
            f"{_pixels(d.first)} to {_pixels(d.second)} px = "
            f"{length(d.distance, unit)} {unit}; first point at "
            f"{place(d.origin, unit)} {unit}, turned {d.turn:g}°",
        )
        for d in layout.backing_drawings
    ]
    heads_of_drawings = (
        "Backing drawing", "File", "SHA-256 of the file", "View", "Calibration",
    )  # fmt: skip
    made.append(table(heads_of_drawings, drawings, (20, 18, 24, 10, 28), width))
    return made


def _kept(drawing: BackingDrawing) -> str:
    """Whether the layout's file holds a backing drawing, or where it has to be."""
    if drawing.linked_file:
        return f"linked, not in the layout's file: {drawing.linked_file}"
    return "in the layout's file" if drawing.picture else "no picture"


def _pixels(point: tuple[float, float]) -> str:
    return f"({point[0]:.5g}, {point[1]:.5g})"


def levels(layout: Layout, unit: str, width: float) -> list[Flowable]:
    """The reference levels as entered, each with its source."""
    if not layout.levels:
        return [paragraph(NO_LEVELS)]
    rows = [
        (
            level.title,
            _level_values(level, unit),
            f"{level.basis}, {level.component}; {level.sum_rule}",
            level.category or "not chosen",
            level.source or "no source entered: no comparison",
            "\n".join(t for t in (level.edition, level.entered_by) if t),
            "\n".join(t for t in (level.uncertainty_rule, level.note) if t),
        )
        for level in layout.levels
    ]
    heads = (
        "Reference level", "Value over frequency", "Basis", "Category", "Source",
        "Edition, entered by", "Uncertainty rule, notes",
    )  # fmt: skip
    return [table(heads, rows, (14, 19, 12, 11, 18, 11, 18), width)]


def _level_values(level: ReferenceLevel, unit: str) -> str:
    values = level.values
    if isinstance(values, LevelTable):
        return "\n".join(
            f"{p.frequency:g} Hz: {flux_density_text(p.level, unit, 4)}"
            for p in values.points
        )
    if not isinstance(values, LevelRanges):
        return "no value entered: no comparison"
    lines = []
    for r in values.ranges:
        span = (
            f"{r.f_from:g} Hz" if r.f_from == r.f_to else f"{r.f_from:g}–{r.f_to:g} Hz"
        )
        value = flux_density_text(r.coefficient, unit, 4)
        if r.exponent == 1:
            value += " · 1 Hz / f"
        elif r.exponent:
            value += f" · (f / 1 Hz)^{-r.exponent:g}".replace("-", "−")
        lines.append(f"{span}: {value}")
    return "\n".join(lines)


def places(layout: Layout, width: float) -> list[Flowable]:
    """Rooms and enclosures."""
    unit = layout.settings.length_unit
    rows = [
        (
            room.title,
            "room",
            _outline(room.outline, unit),
            _room_levels(room, unit),
            "\n".join(t for t in (room.note, _from(layout, room, "outline")) if t),
        )
        for room in layout.rooms
    ]
    rows += [
        (
            e.title,
            f"enclosure, {e.state}",
            _outline(e.footprint, unit),
            f"from {length(e.z_from, unit)} to {length(e.z_to, unit)}"
            + (
                f"; open for work, a body keeps {length(e.front_clearance, unit)} "
                f"from {_front(e)}"
                if e.front_clearance
                else ""
            ),
            "\n".join(t for t in (e.note, _from(layout, e, "footprint")) if t),
        )
        for e in layout.enclosures
    ]
    if not rows:
        return [paragraph("No room and no enclosure was entered.")]
    heads = (
        "Place", "Kind", f"Outline x, y [{unit}]", f"Levels z [{unit}]", "Note, origin",
    )  # fmt: skip
    return [table(heads, rows, (17, 13, 26, 22, 22), width)]


def _room_levels(room: Room, unit: str) -> str:
    """Floor, finished ceiling, structural soffit and slab."""
    soffit = room.soffit_level
    lines = [
        f"floor {length(room.floor_level, unit)}",
        f"finished ceiling {length(room.ceiling_level, unit)}",
        "structural soffit "
        + ("not stated" if soffit is None else length(soffit, unit)),
    ]
    slab = room.slab_above
    lines.append("slab above " + ("not stated" if slab is None else length(slab, unit)))
    return "\n".join(lines)


def _from(layout: Layout, item: Item, field: str) -> str:
    return f"{field_words(field, type(item))}: {origin_text(layout, item, field)}"


def _front(enclosure: Enclosure) -> str:
    """What a body keeps its distance from."""
    if enclosure.front is None:
        return "every side"
    return f"the front, which faces {number_text(enclosure.front)}°"


def _outline(outline: tuple[tuple[float, float], ...], unit: str) -> str:
    shown = "; ".join(place(point, unit) for point in outline[:40])
    return shown + (f"; … {len(outline)} corners in all" if len(outline) > 40 else "")


def zones(layout: Layout, unit: str, width: float) -> list[Flowable]:
    """Zones as entered: where, how high, for whom, by which rule."""
    measure = layout.settings.length_unit
    if not layout.zones:
        return [paragraph("No zone was entered.")]
    names = {level.id: level.title for level in layout.levels}
    rows = [
        (
            zone.title,
            zone.category or "not chosen",
            zone_heights(zone, layout, measure),
            zone.rule,
            _reasons(layout, zone),
            "\n".join(
                part for part in (zone.use, zone.hours, zone.part_of_body) if part
            ),
            ", ".join(names.get(level, level) for level in zone.levels) or "none",
            f"{length(zone.clearance, measure)}\nU: "
            + uncertainty_text(zone.uncertainty or layout.settings.uncertainty, unit),
        )
        for zone in layout.zones
    ]
    heads = (
        "Zone", "Category", f"Heights [{measure}]", "Rule", "Why so", "Use",
        "Reference levels", f"Clearance [{measure}], U",
    )  # fmt: skip
    return [table(heads, rows, (13, 11, 14, 11, 17, 11, 11, 12), width)]


def _reasons(layout: Layout, zone: Zone) -> str:
    """Why these heights and this rule: the note, and where they come from."""
    lines = [zone.note] if zone.note else []
    lines += [_from(layout, zone, field) for field in ("heights", "rule")]
    return "\n".join(lines)


def receptors(layout: Layout, width: float) -> list[Flowable]:
    """Receptors as entered: the mark on the drawings, where, why, for whom."""
    if not layout.receptors:
        return [paragraph("No receptor was entered.")]
    unit = layout.settings.length_unit
    marks = receptor_marks(layout)
    names = {level.id: level.title for level in layout.levels}
    rows = [
        (
            marks[r.id],
            r.title,
            place(r.at, unit),
            r.reason or "not stated",
            r.use or "not stated",
            r.category or "not chosen",
            ", ".join(names.get(level, level) for level in r.levels) or "none",
            origin_text(layout, r, "at"),
        )
        for r in layout.receptors
    ]
    heads = (
        "Mark", "Receptor", f"x, y, z [{unit}]", "Why there", "Use", "Category",
        "Reference levels", "Origin of the place",
    )  # fmt: skip
    return [table(heads, rows, (6, 14, 14, 18, 12, 12, 11, 13), width)]


def zone_heights(zone: Zone, layout: Layout, unit: str) -> str:
    """The heights above the zone's floor, and where that floor is."""
    above = ", ".join(length(height, unit) for height in zone.heights)
    floor = zone_floor(layout, zone)
    text = f"{above} above "
    text += "a floor not stated" if floor is None else f"floor z {length(floor, unit)}"
    if zone.volume is not None:
        low, high = (length(edge, unit) for edge in zone.volume)
        text += f"; volume {low} to {high}"
    return text


def settings(layout: Layout, unit: str, width: float) -> list[Flowable]:
    """What holds for the whole layout."""
    chosen = layout.settings
    low = flux_density_text(chosen.map_low, unit)
    high = flux_density_text(chosen.map_high, unit)
    rule = chosen.decision_rule
    facts = [
        ("Range of every map", f"{low} to {high}, {chosen.map_scale}"),
        ("Uncertainty unless stated", uncertainty_text(chosen.uncertainty, unit)),
        ("Decision rule", f"{rule.kind}, chosen by {rule.chosen_by or 'nobody'}"),
        ("Frequency of the supply", f"{chosen.frequency:g} Hz"),
    ]
    return [fact_table(facts, width)]


def assumption_list(layout: Layout, width: float) -> list[Flowable]:
    """Values without an origin, counted and listed."""
    found = assumptions(layout)
    names = {item.id: item.title for item in layout.items()}
    kinds = {item.id: type(item) for item in layout.items()}
    if not found:
        return [paragraph("Every entered value has an origin.")]
    count = len(found)
    sentence = (
        f"Entered values without an origin: {count}. Each is an assumption until a "
        "document, a measurement or a named person confirms it; its effect may go "
        "either way. What the method itself assumes stands with the method."
    )
    rows = [
        (
            f"A{k}",
            names.get(a.item, a.item),
            field_words(a.field, kinds.get(a.item)),
            a.value,
            a.reason or "none given",
        )
        for k, a in enumerate(found, start=1)
    ]
    heads = ("No.", "Item", "Value of", "As assumed", "Reason given")
    return [paragraph(sentence), table(heads, rows, (6, 22, 16, 38, 18), width)]


def origins(layout: Layout, width: float) -> list[Flowable]:
    """Where values come from that are no assumptions, grouped by their origin."""
    groups: dict[str, dict[str, list[str]]] = {}
    for item in layout.items():
        for origin in item.origins:
            if origin.kind != "assumed":
                items = groups.setdefault(told_origin(layout, origin), {})
                name = field_words(origin.field, type(item))
                items.setdefault(item.title, []).append(name)
    if not groups:
        return [paragraph("No value has an origin.")]
    rows = [
        (
            text,
            "; ".join(f"{item}: {', '.join(f)}" for item, f in items.items()),
        )
        for text, items in groups.items()
    ]
    return [table(("Origin", "Values of"), rows, (34, 66), width)]
