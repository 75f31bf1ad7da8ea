"""What the fields of a layout are called where a person reads of them.

Import place: anywhere; it imports nothing.
"""

from __future__ import annotations

#: Names whose words are not the name itself with spaces.
_WORDS = {
    "absolute": "absolute part",
    "across": "place across",
    "active": "active power",
    "added": "items added",
    "against": "what the base was",
    "apex": "apex conductor",
    "apparent": "apparent power",
    "approved_by": "approved by",
    "at": "place",
    "by": "person",
    "case": "load case",
    "ceiling_level": "finished ceiling level",
    "chosen_by": "who chose it",
    "closing": "closing text",
    "cos_phi": "cos φ",
    "coverage": "coverage factor k",
    "core_circle_diameter": "diameter of the circle of cores",
    "current": "tolerance of the current",
    "demand": "current or power",
    "digest": "digest of the item",
    "end": "connection at the end",
    "ends": "ends that meet",
    "entered_by": "who entered it",
    "f_from": "from frequency",
    "f_to": "to frequency",
    "factor": "factor of the current",
    "factors": "factors of the circuits",
    "fed_at": "place of the feed",
    "field": "value",
    "first": "first point of calibration",
    "foot_z": "height of the foot",
    "id": "identifier",
    "items": "items concerned",
    "label": "conductor",
    "lag": "angle of lag",
    "levels": "reference levels",
    "linked_file": "path of the linked file",
    "map_high": "upper end of the colours",
    "map_low": "lower end of the colours",
    "map_scale": "scale of the colours",
    "measured": "measured value",
    "model": "tolerance of the model",
    "north": "direction of north",
    "open_enclosures": "enclosures open for work",
    "order": "order of the conductors",
    "orders": "orders of conductors",
    "origin": "first corner",
    "origins": "origins of the values",
    "others": "circuits without a factor",
    "own": "currents of its own",
    "ranges": "ranges of frequency",
    "reason": "why it is there",
    "removed": "items removed",
    "replaced": "items replaced",
    "rms": "current (RMS)",
    "second": "second point of calibration",
    "sense": "sense of the angle",
    "sha256": "SHA-256 of the file",
    "shape": "conductor's shape",
    "share": "share of the current",
    "sharing": "tolerance of the sharing",
    "soffit_level": "structural soffit level",
    "spectrum": "harmonics",
    "stand": "how the bars stand",
    "star": "star point",
    "start": "connection at the start",
    "state": "closed or open",
    "sum_rule": "rule for several frequencies",
    "title": "title block",
    "tolerances": "tolerances of the inputs",
    "turn": "angle of turn",
    "turns": "turns of the section",
    "u": "place across (u)",
    "use": "use of the place",
    "v": "place up (v)",
    "values": "values over frequency",
    "z": "height z",
    "z_from": "lower level",
    "z_to": "upper level",
}

#: The same, where the kind of item decides.
_OF_KINDS = {
    ("ConductorLoop", "turns"): "number of turns",
    ("BackingDrawing", "origin"): "place of the first point",
    ("ConfirmedRemark", "by"): "confirmed by",
    ("IssuedResult", "state"): "state",
    ("LevelPoint", "level"): "value of the level",
    ("LevelRange", "exponent"): "exponent of the frequency",
}  # fmt: skip


def field_words(path: str, kind: type | None = None) -> str:
    """A field's dotted name in words.

    Parameters
    ----------
    path : str
        As origins and edits have it; numbers in it count from 0.
    kind : type, optional
        Of the item.

    Examples
    --------
    >>> field_words("net_current"), field_words("section.slots.0.shape.diameter")
    ('net current', "section, slot 1, conductor's shape, diameter")
    >>> field_words("origins.ceiling_level")
    'origin of finished ceiling level'
    """
    first, _, rest = path.partition(".")
    if first == "origins" and rest:
        return f"origin of {field_words(rest, kind)}"
    words: list[str] = []
    for step in path.split("."):
        if step.isdigit() and words:
            words[-1] = f"{words[-1].removesuffix('s')} {int(step) + 1}"
        else:
            name = kind.__name__ if kind is not None else ""
            plain = _WORDS.get(step, step.replace("_", " "))
            words.append(_OF_KINDS.get((name, step), plain))
    return ", ".join(words)
