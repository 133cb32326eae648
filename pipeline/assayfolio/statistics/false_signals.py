"""How often rules signal on a chart of a process that has not changed: an exact Markov chain.

The points are independent and normal about the centre line (moved by `shift` standard deviations, where that
is asked for) and the limits are known. A state of the chain is what the rules have to remember of the points
so far; the next point moves it on by the zone that it falls into, as in C. W. Champ and W. H. Woodall, Exact
results for Shewhart control charts with supplementary runs rules, Technometrics 29 (1987) 393-399 (from
memory). Rules about rising points have no zones: with them the state also holds the newest value itself, as a
density over its zone. On the probability scale, where a value is uniform between 0 and 1, that density is a
polynomial, which Gauss-Legendre nodes integrate exactly while its degree stays below their number, and to
more digits than are given beyond.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cache
from itertools import pairwise
from math import sqrt
from typing import Any, TypeAlias

import numpy as np

from assayfolio.exact import round_significant
from assayfolio.statistics.arguments import Flags, Floats, Places
from assayfolio.statistics.control_charts import D2, D4
from assayfolio.statistics.quadrature import gauss_legendre
from assayfolio.statistics.run_rules import BandRule, CountRule, Rule, StepRule
from assayfolio.statistics.tails import normal_sf

_NODES = 8
_SETTLED = 1e-13
_NEGLIGIBLE = 1e-16
_MOST_STEPS = 20_000
_FAR = 10.0  # beyond every line that a rule looks at
_Memory: TypeAlias = tuple[int, ...]


def expected_signals(rules: Sequence[Rule], points: int) -> float:
    """How many of the first `points` points of a chart are expected to signal: at each one rule or more.

    A point counts whether or not points before it signalled.
    """
    settled = max((rule.window for rule in rules), default=1)
    chances = _chances(tuple(rules), min(points, settled))
    return round_significant(sum(chances) + max(0, points - settled) * chances[-1]) if points > 0 else 0.0


def settled_rate(rules: Sequence[Rule]) -> float:
    """The chance that a point signals once the chart is longer than the longest rule looks back."""
    settled = max((rule.window for rule in rules), default=1)
    return round_significant(_chances(tuple(rules), settled)[-1])


def mean_run_length(rules: Sequence[Rule], shift: float = 0.0) -> float:
    """How many points a chart has on average up to and with the first that signals; infinite without rules.

    The mean of the process stands `shift` standard deviations above the centre line.
    """
    return _mean_run_length(tuple(rules), shift)


def range_signal_rate() -> float:
    """The chance that a moving range of a process that has not changed lies beyond its upper limit.

    The range of two values is sqrt(2) sigma times a normal value without its sign, the limit D4 d2 sigma.
    """
    return round_significant(2 * normal_sf(D4 * D2 / sqrt(2)))


@cache
def _chances(rules: tuple[Rule, ...], points: int) -> tuple[float, ...]:
    """The chance of a signal at each of the first `points` points."""
    chain = _Chain(rules, 0.0)
    density, first = chain.first()
    found = [first]
    for _ in range(points - 1):
        density, chance = chain.next(density, stop=False)
        found.append(chance)
    return tuple(found)


@cache
def _mean_run_length(rules: tuple[Rule, ...], shift: float) -> float:
    if not rules:
        return float("inf")
    chain = _Chain(rules, shift)
    density, _ = chain.first(stop=True)
    left, ratio, total = chain.mass(density), 0.0, 1.0
    constant, enough = 0, max(rule.window for rule in rules)
    for _ in range(_MOST_STEPS):
        total += left
        if left < _NEGLIGIBLE * total:
            break
        density, _ = chain.next(density, stop=True)
        before, on = ratio, chain.mass(density)
        ratio, left = on / left, on
        constant = constant + 1 if abs(ratio - before) < _SETTLED else 0
        if constant > enough:  # from here on the same share of the charts goes on at every point
            total += left / (1 - ratio)
            break
    return round_significant(total, 9)


class _Chain:
    """Everything that the steps of one chain have in common."""

    def __init__(self, rules: tuple[Rule, ...], shift: float) -> None:
        self._zones = _zones(rules, shift)
        self._states = _States([rule for rule in rules if not isinstance(rule, StepRule)], self._zones)
        self._steps = _Steps([rule for rule in rules if isinstance(rule, StepRule)])
        self._weights, self._cumulative = _nodes(_NODES if self._steps.needed else 1)
        self._widths = np.array([zone.chance for zone in self._zones])

    def first(self, *, stop: bool = False) -> tuple[Floats, float]:
        """The densities after the first point, and the chance that it signals."""
        states = self._states
        density = np.zeros((len(states.zone), self._steps.count, len(self._weights)))
        chance = 0.0
        for zone, (state, holds) in enumerate(states.begin):
            chance += self._widths[zone] if holds else 0.0
            if not (holds and stop):
                density[state, 0] += 1.0
        return density, float(chance)

    def mass(self, density: Floats) -> float:
        """The chance that is spread over the densities."""
        each = np.sum(np.sum(density * self._weights, axis=2), axis=1)
        return float(np.sum(each * self._widths[self._states.zone]))

    def next(self, density: Floats, *, stop: bool) -> tuple[Floats, float]:
        """The densities one point on, and the chance that it signals; with `stop` such charts end there."""
        widths = self._widths[self._states.zone][:, None]
        mass = np.sum(density * self._weights, axis=2) * widths
        below = sum(density[:, :, j, None] * self._cumulative[:, j] for j in range(len(self._weights)))
        below = below * widths[:, :, None]
        after, chance = np.zeros_like(density), 0.0
        flat = np.zeros_like(mass)  # what comes from other zones is as likely everywhere in its new one
        for zone in range(len(self._zones)):
            for rising in (True, False):
                inside = self._states.zone == zone
                part = below[inside] if rising else mass[inside][:, :, None] - below[inside]
                told = self._move(after, part, (inside, zone, rising), stop=stop)
                chance += float(np.sum(np.sum(told * self._weights, axis=1))) * self._widths[zone]
                outside = self._states.zone < zone if rising else self._states.zone > zone
                told = self._move(flat, mass[outside].copy(), (outside, zone, rising), stop=stop)
                chance += float(np.sum(told)) * self._widths[zone]
        return after + flat[:, :, None], float(chance)

    def _move(self, after: Floats, part: Floats, move: tuple[Flags, int, bool], *, stop: bool) -> Floats:
        """Add to `after` where the states `here` go with a point in `zone`; return the part that signals."""
        here, zone, rising = move
        states, steps = self._states, self._steps
        signal = states.holds[here, zone][:, None] | steps.holds[rising][None, :]
        told: Floats = part[signal]
        if stop:
            part[signal] = 0.0
        np.add.at(after, (states.after[here, zone][:, None], steps.after[rising][None, :]), part)
        return told


@dataclass(frozen=True, slots=True)
class _Zone:
    """A stretch between neighbouring lines: a value inside it, in standard deviations, and its chance."""

    inside: float
    chance: float


def _zones(rules: Sequence[Rule], shift: float) -> list[_Zone]:
    """The zones between the lines that the rules look at, from the lowest up."""
    levels = {rule.sigmas for rule in rules if not isinstance(rule, StepRule)}
    lines = sorted({float(sign * level) for level in levels for sign in (-1, 1)})
    ends = [float("-inf"), *lines, float("inf")]
    found = []
    for low, high in pairwise(ends):
        inside = (max(low, -_FAR) + min(high, _FAR)) / 2
        found.append(_Zone(inside, _between(low - shift, high - shift)))
    return found


def _between(low: float, high: float) -> float:
    """The chance that a standard normal value lies between the two."""
    if low >= 0:
        return normal_sf(low) - normal_sf(high)
    return normal_sf(-high) - normal_sf(-low)


class _States:
    """What rules about zones remember: for each state its last zone, and where each next zone leads."""

    def __init__(self, rules: Sequence[CountRule | BandRule], zones: Sequence[_Zone]) -> None:
        self._rules, self._inside = rules, [zone.inside for zone in zones]
        known: dict[tuple[int, _Memory], int] = {}
        waiting: list[tuple[int, _Memory]] = []

        def number(zone: int, memory: _Memory) -> int:
            key = (zone, memory)
            if key not in known:
                known[key] = len(known)
                waiting.append(key)
            return known[key]

        nothing = tuple(0 for rule in rules for _ in _sides(rule))
        self.begin = [(number(zone, memory), holds) for zone, memory, holds in self._moves(nothing)]
        after: list[list[int]] = []
        holds: list[list[bool]] = []
        while len(after) < len(waiting):
            moves = list(self._moves(waiting[len(after)][1]))
            after.append([number(zone, memory) for zone, memory, _ in moves])
            holds.append([told for _, _, told in moves])
        self.zone: Places = np.array([zone for zone, _ in waiting])
        self.after: Places = np.array(after)
        self.holds: Flags = np.array(holds, dtype=bool)

    def _moves(self, memory: _Memory) -> Iterator[tuple[int, _Memory, bool]]:
        for zone, inside in enumerate(self._inside):
            kept, told, place = [], False, 0
            for rule in self._rules:
                for side in _sides(rule):
                    bits, holds = _remembered(rule, memory[place], _counts(rule, side, inside))
                    kept.append(bits)
                    told, place = told or holds, place + 1
            yield zone, tuple(kept), told


def _sides(rule: CountRule | BandRule) -> tuple[int, ...]:
    return (1, -1) if isinstance(rule, CountRule) else (1,)


def _counts(rule: CountRule | BandRule, side: int, inside: float) -> bool:
    """Whether a value counts for the rule on that side."""
    if isinstance(rule, CountRule):
        return inside * side > rule.sigmas
    return (abs(inside) > rule.sigmas) == (rule.side == "outside")


def _remembered(rule: CountRule | BandRule, before: int, counts: bool) -> tuple[int, bool]:
    """What is remembered after one point more, and whether the rule holds at it.

    Of an unbroken run that is its length, of others the points that count, as bits, the newest lowest.
    """
    needed = rule.needed if isinstance(rule, CountRule) else rule.window
    if needed == rule.window:
        run = before + 1 if counts else 0
        return min(run, rule.window - 1), run >= rule.window
    seen = (before << 1) | counts
    return seen & ((1 << (rule.window - 1)) - 1), counts and seen.bit_count() >= needed


class _Steps:
    """What rules about rising points remember: direction and length of the run of steps, and of the turns."""

    def __init__(self, rules: Sequence[StepRule]) -> None:
        self.needed = bool(rules)
        self._windows = {
            kind: [rule.window - 1 for rule in rules if rule.steps == kind] for kind in ("one way", "in turn")
        }
        self._most = {kind: max(found, default=1) for kind, found in self._windows.items()}
        known = {(0, 0, 0): 0}
        moves: dict[bool, list[int]] = {True: [], False: []}
        told: dict[bool, list[bool]] = {True: [], False: []}
        waiting = [(0, 0, 0)]
        while len(moves[True]) < len(waiting):
            here = waiting[len(moves[True])]
            for rising in (True, False):
                there, holds = self._moved(here, rising)
                if there not in known:
                    known[there] = len(known)
                    waiting.append(there)
                moves[rising].append(known[there])
                told[rising].append(holds)
        self.count = len(known)
        self.after: dict[bool, Any] = {way: np.array(found) for way, found in moves.items()}
        self.holds: dict[bool, Any] = {way: np.array(found, dtype=bool) for way, found in told.items()}

    def _moved(self, here: tuple[int, int, int], rising: bool) -> tuple[tuple[int, int, int], bool]:
        if not self.needed:
            return here, False
        direction, run, turns = here
        way = 1 if rising else -1
        run = run + 1 if direction == way else 1
        turns = turns + 1 if direction == -way else 1
        holds = any(run >= steps for steps in self._windows["one way"])
        holds = holds or any(turns >= steps for steps in self._windows["in turn"])
        return (way, min(run, self._most["one way"]), min(turns, self._most["in turn"])), holds


@cache
def _nodes(count: int) -> tuple[Floats, Floats]:
    """Weights of Gauss-Legendre nodes on (0, 1), and the weights of the integral from 0 to each node.

    With x_j, w_j the nodes and weights on (-1, 1) and P_k the Legendre polynomials, the integral from -1 to
    x_i of the polynomial through f(x_j) is the sum over k below `count` of
    (2k + 1) / 2 sum_j(w_j P_k(x_j) f(x_j)) times the integral of P_k, which is
    (P_(k+1)(x_i) - P_(k-1)(x_i)) / (2k + 1).
    """
    nodes, weights = gauss_legendre(count)
    values = [np.ones_like(nodes), nodes]
    for k in range(1, count):
        values.append(((2 * k + 1) * nodes * values[k] - k * values[k - 1]) / (k + 1))
    integrals = [nodes + 1]
    integrals += [(values[k + 1] - values[k - 1]) / (2 * k + 1) for k in range(1, count)]
    cumulative = sum(
        (2 * k + 1) / 2 * integrals[k][:, None] * (weights * values[k])[None, :] for k in range(count)
    )
    return weights / 2, np.asarray(cumulative) / 2
