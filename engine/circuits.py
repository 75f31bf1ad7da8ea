"""Circuits and load cases: what currents flow, said the way people know them.

Phasors are complex RMS; a positive angle leads. Angles here are degrees. Voltages of
the lines are the reference: L1 0°, L2 −120°, L3 +120°.
"""

from __future__ import annotations

from typing import Annotated, Literal

from msgspec import Meta

from engine.items import Amperes, Degrees, Hertz, Id, Item, Label, Name, Value, Volts

Sense = Literal["lagging", "leading"]
PowerFactor = Annotated[float, Meta(gt=0, le=1)]
Share = Annotated[float, Meta(ge=0, le=1)]
Factor = Annotated[float, Meta(ge=0, le=1e3)]
Supply = Literal[
    "three-phase four-wire", "three-phase three-wire", "single-phase", "dc", "free"
]

#: Labels of the conductors that carry the load current of each supply.
LINES: dict[str, tuple[str, ...]] = {
    "three-phase four-wire": ("L1", "L2", "L3"),
    "three-phase three-wire": ("L1", "L2", "L3"),
    "single-phase": ("L1",),
    "dc": ("L+",),
    "free": (),
}

#: Label of the conductor through which the lines' sum returns.
RETURNS: dict[str, str] = {
    "three-phase four-wire": "N",
    "single-phase": "N",
    "dc": "L-",
}

#: Label of the net current on its declared path outside the cable.
STRAY = "stray"


class ConductorCurrent(Value, frozen=True, kw_only=True):
    """RMS current and angle of one conductor, as the user states it."""

    label: Label
    rms: Amperes
    angle: Degrees = 0.0


class DirectCurrents(Value, tag="direct", frozen=True, kw_only=True):
    """Current and angle of each conductor, entered directly."""

    currents: Annotated[tuple[ConductorCurrent, ...], Meta(max_length=200)]


class LineLoad(Value, frozen=True, kw_only=True):
    """RMS current of one line and how far it lags or leads its own voltage.

    Exactly one of `cos_phi` (with `sense`) and `lag` is given.
    """

    label: Label
    rms: Amperes
    cos_phi: PowerFactor | None = None
    sense: Sense = "lagging"
    #: Displacement angle, positive lagging. [degrees]
    lag: Degrees | None = None


class LineLoads(Value, tag="line loads", frozen=True, kw_only=True):
    """Current and power factor of each line."""

    loads: Annotated[tuple[LineLoad, ...], Meta(max_length=200)]


class Unbalance(Value, frozen=True, kw_only=True):
    """Negative- and zero-sequence components relative to the positive sequence."""

    negative_ratio: Share = 0.0
    negative_angle: Degrees = 0.0
    zero_ratio: Share = 0.0
    zero_angle: Degrees = 0.0


class BalancedCurrent(Value, tag="balanced", frozen=True, kw_only=True):
    """One current for all lines, with a power factor and perhaps an unbalance."""

    rms: Amperes
    cos_phi: PowerFactor = 0.9
    sense: Sense = "lagging"
    unbalance: Unbalance | None = None


class Power(Value, tag="power", frozen=True, kw_only=True):
    """Power of the whole circuit; exactly one of `apparent` and `active` is given.

    The circuit's voltage is needed: between lines for three phases, line to neutral
    for one, between poles for DC.
    """

    #: [VA]
    apparent: Annotated[float, Meta(ge=0, le=1e12)] | None = None
    #: [W]
    active: Annotated[float, Meta(ge=0, le=1e12)] | None = None
    cos_phi: PowerFactor = 0.9
    sense: Sense = "lagging"
    unbalance: Unbalance | None = None


class MeasuredLine(Value, frozen=True, kw_only=True):
    """RMS current of one conductor as clamped."""

    label: Label
    rms: Amperes


class MeasuredCurrents(Value, tag="as measured", frozen=True, kw_only=True):
    """A clamp survey: magnitudes only, so the lines' sequence is assumed.

    `neutral` and `net` stand beside what the lines give; nothing is reconciled.
    """

    lines: Annotated[tuple[MeasuredLine, ...], Meta(max_length=200)]
    neutral: Amperes | None = None
    net: Amperes | None = None
    cos_phi: PowerFactor | None = None
    sense: Sense = "lagging"
    date: Name = ""
    instrument: Name = ""


Demand = DirectCurrents | LineLoads | BalancedCurrent | Power | MeasuredCurrents


class SpectrumLine(Value, frozen=True, kw_only=True):
    """One frequency of a circuit's spectrum besides its base frequency.

    Exactly one of `ratio` (of the conductor's own current at the base frequency) and
    `rms` is given. The angle of a line at order h is h · (angle of that line's
    fundamental) + `offset`; an `offset` of None is an unknown angle.
    """

    frequency: Hertz
    #: Empty: every line.
    label: Annotated[str, Meta(max_length=40)] = ""
    ratio: Factor | None = None
    rms: Amperes | None = None
    offset: Degrees | None = None


class NeutralShare(Value, tag="share of neutral", frozen=True, kw_only=True):
    """A share of the neutral current, at every frequency, that leaves the cable."""

    share: Share


class EnteredNetCurrent(Value, tag="entered", frozen=True, kw_only=True):
    """A net current entered as such; an angle of None is unknown."""

    rms: Amperes
    angle: Degrees | None = None


class Circuit(Item, frozen=True, kw_only=True):
    """A set of conductors with phasor currents that belong together.

    Net current leaves the cable and returns by the runs that carry the label
    `stray` of this circuit; the neutral in the cable carries the rest.
    """

    supply: Supply = "three-phase four-wire"
    #: 0 for DC. [Hz]
    base_frequency: Hertz = 50.0
    #: Between lines, line to neutral for one phase, between poles for DC. [V]
    voltage: Volts | None = None
    demand: Demand | None = None
    spectrum: Annotated[tuple[SpectrumLine, ...], Meta(max_length=500)] = ()
    #: "computed" closes the lines' sum; "entered" takes the demand's own N.
    neutral: Literal["computed", "entered", "none"] = "computed"
    net_current: NeutralShare | EnteredNetCurrent | None = None
    #: Against the other circuits of the same base frequency.
    phase_relation: Literal["known", "unknown"] = "known"


class CircuitFactor(Value, frozen=True, kw_only=True):
    """How much of a circuit's entered current flows in a load case."""

    circuit: Id
    factor: Factor


class OwnCurrents(Value, frozen=True, kw_only=True):
    """A circuit's own currents in a load case; None keeps what the circuit says."""

    circuit: Id
    demand: Demand | None = None
    spectrum: Annotated[tuple[SpectrumLine, ...], Meta(max_length=500)] | None = None
    neutral: Literal["computed", "entered", "none"] | None = None
    net_current: NeutralShare | EnteredNetCurrent | None = None


class LoadCase(Item, frozen=True, kw_only=True):
    """Which currents flow together; margins show the worst counted case."""

    factors: tuple[CircuitFactor, ...] = ()
    own: tuple[OwnCurrents, ...] = ()
    #: Circuits named in neither: as entered, or switched off.
    others: Literal["as entered", "off"] = "as entered"
    #: Not counted: for information.
    counted: bool = True
    #: Enclosures that are open for work in this case.
    open_enclosures: tuple[Id, ...] = ()
    #: What the case stands for: rated, highest operation, measured, ...
    basis: Name = ""


#: The load case of a layout that has none.
ENTERED_CURRENTS = LoadCase(id="entered-currents", name="Entered currents")
