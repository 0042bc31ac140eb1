"""A whole problem, given as the dictionary that the solver takes: strung, settled and judged the slow way."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import replace
from itertools import pairwise
from typing import Any

import numpy as np

from . import carriage, limits, loads
from .curved import Part, creep_strain, curved_line, lived_through
from .quadrature import Array, Growing, PieceLoad
from .route import route_of
from .section import Section, Settled, Support, settle_section
from .sheave import Feed, begins, lengths_of, run_over
from .spacing import Beside
from .span import AnyMaterial, Material, Piece
from .states import span_state, support_state
from .stringing import Strung, pull_by_rule, string_to

SNAP = 1e-9
"""Places closer than this share of a span are one place."""


class Twin:
    """The problem; `pull` overrides its stringing rule everywhere.

    >>> problem = {
    ...     "line": {"diameter_m": 0.02, "weight_N_per_m": 15.97, "stiffness_N": 34.7e6, "expansion_per_K": 1.9e-5},
    ...     "supports": [{"station_m": x, "elevation_m": 0.0, "hold": "anchor"} for x in (0.0, 300.0)],
    ...     "conditions": [{"temperature_degC": 15.0}],
    ...     "stringing": {"temperature_degC": 15.0, "rule": "span_lengths", "lengths_m": [300.8]},
    ... }
    >>> round(float(Twin(problem).settle(0).spans[0].pull[0]), 5)
    17368.80766
    """

    def __init__(self, problem: Mapping[str, Any]):
        self.problem = problem
        self.line = problem["line"]
        self.route = route_of(problem)
        self.supports = [support_of(row, self.route.axes(j)) for j, row in enumerate(problem["supports"])]
        self.rule = problem["stringing"]
        self._strung: dict[float, Strung] = {}
        self._settled: dict[tuple[int, float | None, bool], Settled] = {}
        self._as_strung: dict[tuple[int, float | None, bool], Settled] = {}

    def material(self, temperature_degC: float, added: float = 0.0) -> AnyMaterial:
        """The line at a temperature: expansion counts from that of the stringing; `added` strain."""
        reference = self.rule["temperature_degC"]
        if self.line.get("parts"):
            return curved_line(self.line, temperature_degC, reference, None, added)
        warmer = temperature_degC - reference
        return Material(self.line["stiffness_N"], self.line.get("expansion_per_K", 0.0) * warmer + added)

    def stretched(
        self, row: Mapping[str, Any], pull_N: float | None, state: str | None = None
    ) -> list[AnyMaterial]:
        """The line of each span at a condition's temperature and in its state."""
        state, temperature = state or row.get("state", "initial"), row["temperature_degC"]
        count = len(self.supports) - 1
        if state == "initial":
            return [self.material(temperature)] * count
        added = float(self.line.get("bedding_in_strain", 0.0))
        added += creep_strain(self.line) if state == "after creep" else 0.0
        if not self.line.get("parts"):
            return [self.material(temperature, added)] * count
        reference = self.rule["temperature_degC"]
        lived = [self.lived(k, state, pull_N) for k in range(count)]
        return [curved_line(self.line, temperature, reference, parts, added) for parts in lived]

    def lived(self, span: int, state: str, pull_N: float | None) -> list[Part]:
        """What the met conditions, and creep at the everyday one, have left in a span."""
        history = self.problem.get("history") or {}
        conditions = self.problem["conditions"]
        flags = history.get("met") or [True] * len(conditions)
        met = [
            (row["temperature_degC"], self.mean_stretch(c, span, pull_N))
            for c, row in enumerate(conditions)
            if flags[c]
        ]
        crept = None
        if state == "after creep" and any(row.get("creep_N") for row in self.line["parts"]):
            everyday = history.get("creep_condition")
            everyday = -1 if everyday is None else everyday
            row = conditions[everyday] if everyday >= 0 else self.rule
            crept = (row["temperature_degC"], self.mean_stretch(everyday, span, pull_N, creeping=True))
        return lived_through(self.line, self.rule["temperature_degC"], met, crept)

    def mean_stretch(self, condition: int, span: int, pull_N: float | None, creeping: bool = False) -> float:
        """Stretched over natural length of a span in a condition, as strung or creeping."""
        key = (condition, pull_N, creeping)
        if key not in self._as_strung:

            def section_at(rolled: float | None) -> Section:
                section = self.section(condition, pull_N, rolled_m=rolled, state="initial")
                return replace(section, material=self.creeping(condition)) if creeping else section

            self._as_strung[key] = carriage.settle(self, condition, pull_N, section_at)
        hung = self._as_strung[key].spans[span]
        return hung.line_length_m() / hung.length_m

    def creeping(self, condition: int) -> AnyMaterial:
        """The line on its creep curves, at a condition's temperature."""
        reference = self.rule["temperature_degC"]
        temperature = self.problem["conditions"][condition]["temperature_degC"] if condition >= 0 else reference
        return curved_line(self.line, temperature, reference, [Part(row, creeping=True) for row in self.line["parts"]])

    def strung(self, pull_N: float) -> Strung:
        """Bare, strung to a horizontal tension."""
        if pull_N not in self._strung:
            reference = self.material(self.rule["temperature_degC"])
            plumb = string_to(reference, self.line["weight_N_per_m"], self.supports, pull_N)
            self._strung[pull_N] = self.pulled_in(plumb, pull_N) if self.sheaves_in_play() else plumb
        return self._strung[pull_N]

    def sheaves_in_play(self) -> bool:
        """Whether the line is strung over sheaves, or runs over one in service."""
        return self.over_sheaves() or any(support.hold == "sheave" for support in self.supports)

    def over_sheaves(self) -> bool:
        """Whether the line is pulled in over sheaves and then clamped."""
        return bool(self.rule.get("method", "clamped") == "over_sheaves")

    def feeds(self, clamps: str, pull_N: float | None = None, drag: int = 0) -> dict[int, Feed]:
        """What natural length does while the line is strung; `clamps`: at hangers and posts between anchors.

        pull_N: what a winch at each section's first support keeps; None where nothing comes in.
        """
        holds = [support.hold for support in self.supports]
        found = {}
        for j, row in enumerate(self.problem["supports"][:-1]):
            if begins(holds, j):
                if pull_N is not None:
                    found[j] = Feed("winch", pull_N=pull_N)
            else:
                own = row.get("sheave_friction") if holds[j] == "sheave" else None
                mu = self.rule.get("friction", 0.0) if own is None else own
                found[j] = Feed("sheave" if holds[j] == "sheave" else clamps, mu, drag)
        return found

    def pulled_in(self, plumb: Strung, pull_N: float, drag: int = 0) -> Strung:
        """From spans of equal horizontal tension to those of a line that is pulled in."""
        clamps = "sheave" if self.over_sheaves() else "plumb"
        section = replace(self.bare(plumb.lengths_m), supports=held_down(self.supports, plumb))
        settled = run_over(section, self.feeds(clamps, pull_N, drag))
        return Strung(lengths_of(settled), list(settled.spans), list(settled.clamps), section.supports)

    def bare(self, lengths: list[float]) -> Section:
        """The bare line at the stringing temperature."""
        load = np.array([0.0, 0.0, -self.line["weight_N_per_m"]])
        spans = [[Piece(length, load)] for length in lengths]
        links = self.link_loads({})
        return Section(self.material(self.rule["temperature_degC"]), spans, self.supports, links, self.route, links)

    def lengths_m(self, pull_N: float | None = None) -> list[float]:
        """Natural length of each span."""
        if pull_N is None and self.rule["rule"] == "span_lengths":
            return [float(length) for length in self.rule["lengths_m"]]
        strung = self.strung(self.pull_N() if pull_N is None else pull_N)
        if self.over_sheaves() and self.rule.get("clip", "plumb") == "plumb":
            section = replace(self.bare(strung.lengths_m), supports=strung.supports)
            return lengths_of(run_over(section, self.feeds("plumb")))
        return strung.lengths_m

    def pull_N(self) -> float:
        """The pull of the stringing rule."""
        if self.rule["rule"] == "pull":
            return float(self.rule["value"])
        longest = max(math.dist(a.place[:2], b.place[:2]) for a, b in pairwise(self.supports))
        taut = 0.42 * self.line["weight_N_per_m"] * longest
        low = taut if self.rule["rule"] == "tension" else 0.05 * taut
        return pull_by_rule(self.strung, self.rule, low)

    def settle(self, condition: int, pull_N: float | None = None, with_addition: bool = True) -> Settled:
        """A condition in equilibrium; -1 is the bare line at stringing."""
        key = (condition, pull_N, with_addition)
        if key not in self._settled:
            self._settled[key] = carriage.settle(
                self, condition, pull_N, lambda rolled: self.section(condition, pull_N, with_addition, rolled)
            )
        return self._settled[key]

    def at_rest(self, section: Section) -> Settled:
        """A section in equilibrium, with natural length that runs over the sheaves in service."""
        service = {j: Feed("sheave") for j, support in enumerate(self.supports) if support.hold == "sheave"}
        return run_over(section, service) if service else settle_section(section)

    def states(self, condition: int, pull_N: float | None = None) -> dict[str, list[dict[str, float]]]:
        """Spans and supports of a condition in equilibrium, keys as in the solver's results."""
        settled = self.settle(condition, pull_N)
        return {
            "spans": [span_state(settled, k) for k in range(len(settled.spans))],
            "supports": [support_state(settled, j) for j in range(len(self.supports))],
        }

    def section(
        self,
        condition: int,
        pull_N: float | None,
        with_addition: bool = True,
        rolled_m: float | None = None,
        state: str | None = None,
    ) -> Section:
        """The loads of a condition on the natural lengths; a carriage at natural length `rolled_m`; `state` instead of
        the condition's own.
        """
        lengths = self.lengths_m(pull_N)
        row = (
            self.problem["conditions"][condition]
            if condition >= 0
            else {"temperature_degC": self.rule["temperature_degC"]}
        )
        placed = [self.placed(load, lengths, pull_N, rolled_m) for load in row.get("loads", ())]
        starts = np.concatenate([[0.0], np.cumsum(lengths)])
        spans = []
        for k, length in enumerate(lengths):
            basic = loads.basic(self.line, row, with_addition, k, self.along(k)[:2])
            spans.append(self.pieces(k, float(starts[k]), length, basic, placed, row.get("factor_load", 1.0)))
        links = self.link_loads(row)
        clamp_loads = links + self.clamp_loads(starts, placed, row)
        return Section(self.stretched(row, pull_N, state), spans, self.supports, clamp_loads, self.route, links)

    def placed(
        self, load: Mapping[str, Any], lengths: list[float], pull_N: float | None, rolled_m: float | None = None
    ) -> tuple[float, float, Mapping[str, Any]]:
        """First and last natural length of a load (one and the same for a point load), and the load."""
        place = load.get("place", "whole")
        if load.get("is_run"):
            raise NotImplementedError("loads per run are in .run, for one span")
        if load.get("carriage", "none") != "none" and rolled_m is not None:
            return rolled_m, rolled_m, load
        if place == "whole":
            return 0.0, sum(lengths), load
        ends = [load["from_m"], load["from_m"] if load.get("is_point") else load["to_m"]]
        if place == "station":
            strung = self.settle(-1, pull_N)
            point = bool(load.get("is_point"))
            within = [None if point else self.drawn_in(strung, far, x) for far, x in enumerate(ends)]
            ends = [length_at_station(strung, x) if s is None else s for x, s in zip(ends, within, strict=True)]
        return ends[0], ends[1], load

    def drawn_in(self, strung: Settled, far: int, station_m: float) -> float | None:
        """The line's end on one side, where a station lies between the support there and its clamp, drawn inwards."""
        span = len(strung.spans) - 1 if far else 0
        clamp = strung.station(span, strung.clamps[-1 if far else 0])
        support = strung.station(span, self.supports[-1 if far else 0].place)
        between = clamp < station_m <= support if far else support <= station_m < clamp
        if not between:
            return None
        return sum(hung.length_m for hung in strung.spans) if far else 0.0

    def vector(self, load: Mapping[str, Any], span: int) -> Array:
        """A load's vector in route axes."""
        vector = np.asarray(load["vector"], dtype=np.float64)
        return vector if load.get("frame", "span") == "route" else self.turned(vector, span)

    def along(self, span: int) -> Array:
        """Plan direction of a span between its supports."""
        run = self.supports[span + 1].place - self.supports[span].place
        return np.array([run[0], run[1], 0.0]) / math.hypot(run[0], run[1])

    def turned(self, vector: Array, span: int) -> Array:
        """From a span's axes (along, to the left, up) between its supports into the route's."""
        along = self.along(span)
        return np.asarray(vector[0] * along + vector[1] * np.array([-along[1], along[0], 0.0]) + [0.0, 0.0, vector[2]])

    def pieces(
        self,
        span: int,
        start: float,
        length: float,
        basic: Array,
        placed: list[tuple[float, float, Mapping[str, Any]]],
        factor: float = 1.0,
    ) -> list[Piece]:
        """A span cut wherever a load begins, ends or acts."""
        snap = SNAP * length
        cuts = [0.0]
        for place in sorted(end - start for load in placed for end in load[:2]):
            if cuts[-1] + snap < place < length - snap:
                cuts.append(place)
        cuts.append(length)
        found = []
        for low, high in pairwise(cuts):
            load, rate, force = self.turned(basic, span), np.zeros(3), np.zeros(3)
            for first, last, row in placed:
                if row.get("is_point"):
                    at_end = abs(first - start - high) <= snap and high < length
                    force = force + (factor * self.vector(row, span) if at_end else 0.0)
                elif first - start < 0.5 * (low + high) < last - start and covers(row, span):
                    load = load + factor * self.vector(row, span)
                    if row.get("vector_to") is not None:
                        more = self.vector({**row, "vector": row["vector_to"]}, span) - self.vector(row, span)
                        load = load + factor * more * (start + low - first) / (last - first)
                        rate = rate + factor * more / (last - first)
            piece_load: PieceLoad = Growing(load, rate) if rate.any() else load
            found.append(Piece(high - low, piece_load, force))
        return found

    def clamp_loads(
        self, starts: Array, placed: list[tuple[float, float, Mapping[str, Any]]], condition: Mapping[str, Any]
    ) -> Array:
        """The point loads that act right at a clamp, in the axes of the span ahead; N, (n + 1, 3)."""
        found = np.zeros((len(self.supports), 3))
        for j in range(len(self.supports)):
            span = min(j, len(self.supports) - 2)
            snap = SNAP * float(starts[span + 1] - starts[span])
            for first, _, row in placed:
                if row.get("is_point") and abs(first - starts[j]) <= snap:
                    found[j] += condition.get("factor_load", 1.0) * self.vector(row, span)
        return found

    def link_loads(self, condition: Mapping[str, Any]) -> Array:
        """Half of each hanger's weight and wind: at its clamp, and once more at its support; N, (n + 1, 3)."""
        found = np.zeros((len(self.supports), 3))
        for j, support in enumerate(self.supports):
            if support.hangs:
                span = min(j, len(self.supports) - 2)
                area = self.problem["supports"][j].get("hanger_wind_area_m2", 0.0)
                own = loads.at_hanger(condition, support.hanger_weight_N, area, self.along(span)[:2])
                found[j] = self.turned(own, span)
        return found

    def judge(self, pull_N: float | None = None) -> dict[tuple[int, int], limits.Verdict]:
        """The verdict on each limit in each condition that it applies to, where there is one."""
        found = {}
        for i, rule in enumerate(self.problem.get("limits", ())):
            for c in range(len(self.problem["conditions"])):
                if not rule.get("applies") or rule["applies"][c]:
                    bare = (
                        self.settle(c, pull_N, with_addition=False)
                        if rule["kind"] == "swing"
                        else self.settle(c, pull_N)
                    )
                    settled = self.settle(c, pull_N)
                    verdict = limits.judge(self.problem, i, settled, bare, self.beside(rule, c))
                    if verdict is not None:
                        found[i, c] = verdict
        return found

    def beside(self, rule: Mapping[str, Any], condition: int) -> Beside | None:
        """The line that a spacing keeps from: `others` of the problem lists (problem, condition, shift)."""
        if rule["kind"] != "spacing":
            return None
        problem, other_condition, shift = self.problem["others"][rule["courses"][condition]]
        return Beside(Twin(problem).settle(other_condition), np.asarray(shift, dtype=np.float64))

    def worst(self, pull_N: float) -> float:
        """The greatest utilisation of all limits at a pull; 0 without any."""
        return max((verdict.utilisation for verdict in self.judge(pull_N).values()), default=0.0)


def covers(load: Mapping[str, Any], span: int) -> bool:
    """Whether a load acts on a span."""
    return load.get("covers") is None or bool(load["covers"][span])


def held_down(supports: Sequence[Support], strung: Strung) -> list[Support]:
    """The supports of a line while it is strung: a hanger that it would lift is a fixed point at its plumb end."""
    held = []
    for j, support in enumerate(supports):
        inner = support.hangs and 0 < j < len(supports) - 1
        lift = strung.spans[j].pull[2] - strung.spans[j - 1].end_tension()[2] if inner else 0.0
        lifted = inner and lift >= 0.5 * support.hanger_weight_N
        held.append(Support(support.plumb(), axes=support.axes) if lifted else support)
    return held


def support_of(row: Mapping[str, Any], axes: Array) -> Support:
    """A support from its row of the problem; an anchor's rates may be missing, and a post has none upwards."""

    def rate(key: str) -> float:
        given = row.get(f"stiffness_{key}_N_per_m")
        return math.inf if given is None else float(given)

    vertical = rate("vertical") if row.get("hold", "anchor") == "anchor" else math.inf
    return Support(
        np.array([row["station_m"], row.get("offset_m", 0.0), row["elevation_m"]], dtype=np.float64),
        row.get("hold", "anchor"),
        row.get("hanger_length_m", 0.0),
        row.get("hanger_weight_N", 0.0),
        (rate("along"), rate("across"), vertical),
        row.get("hanger_spread_m", 0.0),
        axes,
    )


def length_at_station(settled: Settled, station_m: float) -> float:
    """First natural length from the first support at which a section passes a station, by bisection."""
    passed = 0.0
    for k, hung in enumerate(settled.spans):
        samples = np.linspace(0.0, hung.length_m, 65)
        stations = [settled.station(k, settled.position_at(k, float(s))) - station_m for s in samples]
        stations[0] = 0.0 if abs(stations[0]) <= 1e-9 * (1.0 + abs(station_m)) else stations[0]
        stations[-1] = 0.0 if abs(stations[-1]) <= 1e-9 * (1.0 + abs(station_m)) else stations[-1]
        for i in range(64):
            if stations[i] * stations[i + 1] <= 0.0:
                low, high, sign = (
                    float(samples[i]),
                    float(samples[i + 1]),
                    math.copysign(1.0, stations[i + 1] - stations[i]),
                )
                while high - low > 4e-16 * hung.length_m:
                    middle = 0.5 * (low + high)
                    if not low < middle < high:
                        break
                    ahead = (settled.station(k, settled.position_at(k, middle)) - station_m) * sign > 0.0
                    low, high = (low, middle) if ahead else (middle, high)
                return passed + 0.5 * (low + high)
        passed += hung.length_m
        clamp = settled.clamps[k + 1]  # inside of an angle point it ends one span's stations before the next begins
        if k + 1 < len(settled.spans) and settled.station(k, clamp) <= station_m <= settled.station(k + 1, clamp):
            return passed
    raise ValueError(f"the line does not pass station {station_m} m")
