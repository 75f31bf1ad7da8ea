"""Budgets of uncertainty: what the tolerances of the inputs come to at a place.

Every input is moved by its standard tolerance, up and down, and what the value does is
its part: the root of the mean of the two squares. For a value that is linear in the
input this is the law of propagation of uncertainty (JCGM 100:2008, 5.1.2) for inputs
that do not depend on each other; where the field nearly cancels, and has no derivative,
it does not vanish. The field is linear in currents, and moves of conductors are taken
from their responses. Currents drawn at random beside it check the propagation.

Not in a budget: errors of the description itself, such as a wrong phase order.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from engine.budget import Budget, BudgetLine, InputKind, OriginKind, Sampled
from engine.case_fields import CaseCurrents, CaseFields
from engine.circuits import Circuit
from engine.contributions import label_responses
from engine.displacements import Displacements
from engine.evaluations import Evaluation, Quantity
from engine.items import Item
from engine.layout import Layout
from engine.levels import is_kind
from engine.origins import origin_of
from engine.place_details import root_sum_of_squares
from engine.places import Receptor, Zone
from engine.results import PlaceDetails
from engine.varied_currents import CircuitAtPlace, PerLabel, Spread, spread_of
from engine.varied_sharing import ParallelSet, SharingAtPlace, parallel_sets

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]

#: Currents drawn at random, and the beginning of their sequence.
N_SAMPLES = 2000
SEED = 20_240_501

#: Where the origin of an input stands, by kind of input.
_FIELDS: dict[str, tuple[str, ...]] = {
    "current magnitude": ("demand",),
    "current angle": ("demand",),
    "unbalance": ("demand",),
    "net current": ("net_current",),
    "section pitch": ("section",),
    "sharing": ("section",),
    "position": ("route", "path", "origin", "terminals"),
    "place": ("at", "outline"),
}

#: The tolerance of each kind of input, by its field of `Tolerances`.
_TOLERANCES: dict[str, str] = {
    "current magnitude": "current",
    "current angle": "angle",
    "unbalance": "unbalance",
    "net current": "net_current",
    "section pitch": "pitch",
    "sharing": "sharing",
    "position": "position",
    "place": "place",
}

_OF_CURRENTS = (
    "current magnitude", "current angle", "unbalance", "net current", "sharing",
)  # fmt: skip

#: What a tolerance is counted in.
_UNITS: dict[str, str] = {
    "current angle": "degrees",
    "position": "m",
    "place": "m",
}


class Budgets:
    """Budgets of the values of one layout.

    Parameters
    ----------
    layout : Layout
        Its settings hold the tolerances.
    fields : CaseFields
        Of the layout.
    """

    def __init__(self, layout: Layout, fields: CaseFields) -> None:
        self.layout, self.fields = layout, fields
        self.tolerances = layout.settings.tolerances
        self._displacements = Displacements(layout, fields)
        self._parallel: dict[str, list[ParallelSet]] = {}
        if self.tolerances.sharing > 0:
            for found in parallel_sets(fields.conductors):
                self._parallel.setdefault(found.item, []).append(found)

    def look_at(self, points: Floats) -> None:
        """Compute all moves of conductors for (n, 3) points at once. [m]"""
        self._displacements.look_at(points)

    def budget(
        self,
        place: Zone | Receptor,
        quantity: Quantity,
        points: Floats,
        value: float | None = None,
        *,
        n_samples: int = N_SAMPLES,
        seed: int = SEED,
    ) -> Budget:
        """The budget of a quantity at a place.

        Parameters
        ----------
        points : (q, 3) float
            Where the value is taken, or over what it is a mean: see `places_of`. [m]
        value : float, optional
            The value that the budget is for, where it is a mean over an area: the
            budget at the place of the largest value holds for it in proportion. [T]
        """
        case = self.fields.cases[quantity.case]
        self.look_at(points)
        b = self.fields.flux_density_at(case, points)
        here = _Here(case, quantity, b)
        circuits = [*self._circuits(case, points)]
        sharing = self._sharing(case, points)
        parts = [*self._parts(here, place, points, circuits)]
        parts += self._sharing_parts(here, sharing)
        sampled = self._sampled(here, circuits, sharing, n_samples, seed)
        now, scale = here.value, 1.0
        if value is not None and now > 0:
            now, scale = value, value / now
        score = here.score * scale
        model = self.tolerances.model
        lines = [_line_scaled(line, scale) for line, _ in parts]
        if model:
            lines.append(_line("model", "", "", model, "assumed", model * now, 0.0))
        variance = sum(line.standard**2 for line in lines)
        if variance > 0:
            lines = [replace(x, share=x.standard**2 / variance) for x in lines]
        of_currents = [x.standard for x in lines if x.input in _OF_CURRENTS]
        ratio = None
        if quantity.level is not None:
            of_ratio = [scale * part for _, part in parts]
            ratio = float(np.linalg.norm([*of_ratio, model * score]))
        return Budget(
            place=place.id,
            case=case.case.id,
            level="" if quantity.level is None else quantity.level.id,
            kind=quantity.kind,
            at=tuple((float(x), float(y), float(z)) for x, y, z in points),
            value=now,
            lines=tuple(sorted(lines, key=lambda line: -line.standard)),
            standard=float(np.sqrt(variance)),
            ratio_standard=ratio,
            currents_standard=float(np.linalg.norm(of_currents)),
            sampled=_scaled(sampled, scale),
        )

    def _circuits(
        self, case: CaseCurrents, points: Floats
    ) -> Iterator[tuple[CircuitAtPlace, Spread]]:
        """Circuits with any current, at the points."""
        per_label: PerLabel = {}
        at = [self.fields.at((float(x), float(y), float(z))) for x, y, z in points]
        found = [label_responses(self.fields.conductors, p.responses) for p in at]
        for key in found[0]:
            per_label[key] = np.array([one[key] for one in found])
        flowing = {id for id, _ in case.phasors.values}
        for circuit in self.layout.circuits:
            if circuit.id in flowing:
                spread = spread_of(
                    self.tolerances,
                    self._factor(self._origin(circuit, "current magnitude", case)),
                    self._factor(self._origin(circuit, "net current", case)),
                )
                yield CircuitAtPlace(circuit, case, per_label, len(points)), spread

    def _parts(
        self,
        here: _Here,
        place: Zone | Receptor,
        points: Floats,
        circuits: Sequence[tuple[CircuitAtPlace, Spread]],
    ) -> Iterator[tuple[BudgetLine, float]]:
        """Lines, and their part of the ratio's standard uncertainty."""
        for at_place, spread in circuits:
            circuit = at_place.circuit
            for name, changes in at_place.one_by_one(spread):
                origin = self._origin(circuit, name, here.case)
                tolerance = self._tolerance(name, origin)
                yield here.part(name, circuit, "", tolerance, origin, changes)
        items = self.layout.by_id()
        for move in self._displacements.moves:
            item: Item = place if move.item is None else items[move.item]
            origin = self._origin(item, move.input, here.case)
            factor = self._factor(origin)
            # A smaller tolerance moves less: the field is all but linear over it.
            changes = factor * self._displacements.changes(move, here.case, points)
            tolerance = self._tolerance(move.input, origin)
            yield here.part(move.input, item, move.axis, tolerance, origin, changes)

    def _sharing(self, case: CaseCurrents, points: Floats) -> dict[str, Complexes]:
        """By run, (v, c, q, 3) changes when a parallel conductor carries more. [T]"""
        if not self._parallel:
            return {}
        at = [self.fields.at((float(x), float(y), float(z))) for x, y, z in points]
        responses = np.stack([place.responses for place in at], axis=1)
        here = SharingAtPlace(self.fields.conductors, responses, points)
        items = self.layout.by_id()
        found = {}
        for item, sets in self._parallel.items():
            tolerance = self._tolerance(
                "sharing", self._origin(items[item], "sharing", case)
            )
            changes = [here.changes(one, case, tolerance) for one in sets]
            whole = np.concatenate(changes)
            if np.any(whole):
                found[item] = whole
        return found

    def _sharing_parts(
        self, here: _Here, sharing: dict[str, Complexes]
    ) -> Iterator[tuple[BudgetLine, float]]:
        """As `_parts`, of runs whose parallel conductors share unequally."""
        items = self.layout.by_id()
        for item, changes in sharing.items():
            origin = self._origin(items[item], "sharing", here.case)
            tolerance = self._tolerance("sharing", origin)
            steps = np.concatenate([changes, -changes])
            yield here.part("sharing", items[item], "", tolerance, origin, steps)

    def _sampled(
        self,
        here: _Here,
        circuits: Sequence[tuple[CircuitAtPlace, Spread]],
        sharing: dict[str, Complexes],
        n: int,
        seed: int,
    ) -> Sampled:
        random = np.random.default_rng(seed)
        b = np.repeat(here.b[None], n, axis=0)
        for at_place, spread in circuits:
            drawn = at_place.at_random(spread, n, random)
            b += drawn - at_place.field(at_place.phasors)
        for changes in sharing.values():
            size = random.standard_normal((n, len(changes)))
            b += np.einsum("nv,vcqx->ncqx", size, changes)
        values, _ = here.evaluated(b)
        p5, p50, p95 = (float(x) for x in np.percentile(values, (5, 50, 95)))
        return Sampled(n, seed, float(values.std()), p5, p50, p95)

    def _origin(self, item: Item, name: str, case: CaseCurrents) -> OriginKind:
        """Where an input comes from: a case's own currents from the case."""
        if isinstance(item, Circuit):
            own = next((o for o in case.case.own if o.circuit == item.id), None)
            if own is not None and own.demand is not None:
                found = origin_of(case.case, "own")
                return "assumed" if found is None else found.kind
        for field in _FIELDS[name]:
            found = origin_of(item, field)
            if found is not None:
                return found.kind
        return "assumed"

    def _factor(self, origin: OriginKind) -> float:
        return self.tolerances.measured_part if origin == "measured" else 1.0

    def _tolerance(self, name: str, origin: OriginKind) -> float:
        of_one: float = getattr(self.tolerances, _TOLERANCES[name])
        return of_one * self._factor(origin)


class _Here:
    """One quantity at one place, with the field changed at will.

    Parameters
    ----------
    b : (c, q, 3) complex
        RMS phasors at the q points whose values are averaged. [T]
    """

    def __init__(self, case: CaseCurrents, quantity: Quantity, b: Complexes) -> None:
        self.case, self.quantity, self.b = case, quantity, b
        values, scores = self.evaluated(b[None])
        self.value, self.score = float(values[0]), float(scores[0])

    def evaluated(self, b: Complexes) -> tuple[Floats, Floats]:
        """(n,) values [T] and (n,) scores of (n, c, q, 3) fields."""
        n, c, q, _ = b.shape
        flat = np.ascontiguousarray(b.transpose(1, 2, 0, 3)).reshape(c, q * n, 3)
        evaluation = Evaluation(self.case, flat, np.zeros(q * n, bool), q)
        scores = evaluation.unmasked_score(self.quantity)
        if self.quantity.level is None:
            return scores, scores
        by_frequency = evaluation.by_frequency(self.quantity.level)[0]
        kind = self.quantity.kind
        values = [v for f, v in by_frequency.items() if is_kind(f, kind)]
        return root_sum_of_squares(values), scores

    def part(
        self,
        name: str,
        item: Item,
        axis: str,
        tolerance: float,
        origin: OriginKind,
        changes: Complexes,
    ) -> tuple[BudgetLine, float]:
        """A line from (2 v, c, q, 3) changes of the field, and its ratio's part."""
        values, scores = self.evaluated(self.b + changes)
        standard = _root(values - self.value)
        n = len(values) // 2
        effect = 0.5 * float(values[0] - values[n]) if n == 1 else 0.0
        line = _line(name, item.id, axis, tolerance, origin, standard, effect)
        return line, _root(scores - self.score)


def _root(steps: Floats) -> float:
    """Root of the sum over inputs of the mean square of the steps up and down."""
    return float(np.sqrt(np.sum(steps**2) / 2.0))


def _line(
    name: str,
    item: str,
    axis: str,
    tolerance: float,
    origin: OriginKind,
    standard: float,
    effect: float,
) -> BudgetLine:
    kind: InputKind = name  # type: ignore[assignment]
    unit = _UNITS.get(name, "part")
    return BudgetLine(kind, item, axis, tolerance, unit, origin, standard, effect)


def _line_scaled(line: BudgetLine, scale: float) -> BudgetLine:
    return replace(line, standard=scale * line.standard, effect=scale * line.effect)


def _scaled(sampled: Sampled, scale: float) -> Sampled:
    return replace(
        sampled,
        standard=scale * sampled.standard,
        p5=scale * sampled.p5,
        p50=scale * sampled.p50,
        p95=scale * sampled.p95,
    )


def places_of(place: Zone | Receptor, details: PlaceDetails) -> Floats:
    """(q, 3) points whose values make the value: heights of a mean, or one. [m]"""
    x, y, z = details.at
    if not isinstance(place, Zone) or place.rule != "three-height mean":
        return np.array([details.at])
    largest = max(details.by_height, key=lambda pair: pair[1])[0]
    floor = z - largest
    return np.array([(x, y, floor + height) for height, _ in details.by_height])
