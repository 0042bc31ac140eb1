"""Every hold, load and material beside the plain line, in one run. By hand: python tests/bench/bench_kinds.py

Ten spans of 250 m over a rolling profile under wind and weight. The plain line hangs on hangers, clamped, linear;
each row changes one thing. `exact` are Newton steps of the exact line in all, `evaluations` those of the optimiser.
"""

from __future__ import annotations

import math
from typing import Any

from bench_settle import clock

import tautwise as tw

SPANS, SPAN_M, SAG_SPAN = 10, 250.0, 4
LINE = {"diameter": "18.8 mm", "weight": "7.75 N/m", "stiffness": "14.9 MN", "expansion": "18.9e-6 / K"}
CURVE = {"initial": ["0 MPa", "640 MPa", "-300 MPa"], "final_modulus": "66 GPa", "creep": ["0 MPa", "450 MPa"]}
CORE = {"initial": ["0 MPa", "260 MPa"], "final_modulus": "26.5 GPa", "expansion": "11.5e-6 / K"}
OUTER = {"initial": ["-3 MPa", "340 MPa", "-80 MPa", "-300 MPa"], "final_modulus": "47 GPa",
         "creep": ["0 MPa", "115 MPa"], "expansion": "23e-6 / K"}  # fmt: skip
BARE = {key: LINE[key] for key in ("diameter", "weight")} | {"area": "240 mm^2"}
ONE_PART = BARE | {"curve": CURVE | {"expansion": "18.9e-6 / K"}}
TWO_PARTS = BARE | {"core": CORE, "outer": OUTER}
HANGER = {"hold": "hanger", "length": "1.8 m", "weight": "300 N"}


def supports(inner: dict[str, Any], ends: dict[str, Any] | None = None, turn_deg: float = 0.0) -> list[dict[str, Any]]:
    """The supports, all inner ones alike; with a turn they are given by east and north and bend at every second one."""
    rows, east, north, bearing = [], 0.0, 0.0, 0.0
    for j in range(SPANS + 1):
        own = inner if 0 < j < SPANS else ends or {"hold": "anchor"}
        row = {"name": f"S{j}", "elevation": f"{25 + 6 * math.sin(1.3 * j)} m", **own}
        place = {"east": f"{east} m", "north": f"{north} m"} if turn_deg else {"station": f"{j * SPAN_M} m"}
        rows.append(row | place)
        bearing += math.radians(turn_deg) * (j % 2)
        east, north = east + SPAN_M * math.cos(bearing), north + SPAN_M * math.sin(bearing)
    return rows


def line(inner: dict[str, Any] = HANGER, *, of: dict[str, Any] = LINE, ends: dict[str, Any] | None = None,
         turn_deg: float = 0.0, method: str = "clamped", **condition: Any) -> tw.Project:  # fmt: skip
    """The plain line with one thing changed."""
    wind = {"pressure": "300 Pa"} | ({"bearing": "170 deg"} if turn_deg else {})
    row = {"name": "wind", "temperature": "5 degC", "wind": wind} | condition
    stringing = {"temperature": "15 degC", "horizontal_tension": "14 kN", "method": method}
    return tw.Project(line=of, support=supports(inner, ends, turn_deg), stringing=stringing, condition=[row])


def kinds() -> dict[str, tw.Project]:
    """What is timed."""
    spring = {"stiffness_along": "800 kN/m", "stiffness_across": "400 kN/m", "stiffness_vertical": "2 MN/m"}
    post = {"hold": "post", "stiffness_along": "60 kN/m", "stiffness_across": "80 kN/m"}
    return {
        "plain: hangers, clamped, linear": line(),
        "anchors": line({"hold": "anchor"}),
        "anchors on springs": line({"hold": "anchor"} | spring, ends={"hold": "anchor"} | spring),
        "posts": line(post),
        "V hangers": line(HANGER | {"form": "V", "spread": "2.9 m"}),
        "hangers in wind": line(HANGER | {"wind_area": "0.3 m^2"}),
        "sheaves": line({"hold": "sheave"}),
        "swinging sheaves": line({"hold": "sheave", "length": "0.7 m", "weight": "200 N"}),
        "turning 12 deg at every second support": line(post, turn_deg=12.0),
        "strung over sheaves": line(method="over sheaves"),
        "ice on every second span": line(
            ice={"thickness": "10 mm", "density": "900 kg/m^3", "pattern": [1, 0]}
        ),
        "load factors": line(factors={"weight": 1.1, "wind": 1.4}),
        "point load": line(load=[{"force": "2 kN", "at": "1130 m"}]),
        "load on a stretch": line(load=[{"per_length": "20 N/m", "from": "1050 m", "to": "1180 m"}]),
        "ramp": line(load=[{"per_length": "0 N/m", "per_length_to": "30 N/m", "from": "1050 m", "to": "1180 m"}]),
        "load per run on one span": line(load=[{"per_run": "20 N/m", "spans": ["S4"]}]),
        "carriage, free": line(load=[{"force": "2 kN", "carriage": "free", "at": "1130 m"}]),
        "carriage, held": line(load=[{"force": "2 kN", "carriage": "held", "at": "1190 m"}]),
        "curve of one part": line(of=ONE_PART),
        "curve of one part, final": line(of=ONE_PART, state="final"),
        "two parts": line(of=TWO_PARTS),
        "two parts, after creep": line(of=TWO_PARTS, state="after creep"),
        "bedding in, final": line(of=LINE | {"bedding_in": "0.05 %"}, state="final"),
    }


def main() -> None:
    plain = 0.0
    print(f"{SPANS} spans, settled with proof{'':16}sag, m      gap  evaluations  exact     ms  times plain")
    for name, project in kinds().items():
        found = project.settle("wind")
        seconds = clock(lambda project=project: project.settle("wind"))
        plain = plain or seconds
        print(f"{name:40} {found.spans[SAG_SPAN].sag_m:9.3f} {found.gap_relative:8.1e} {found.evaluations:12d} "
              f"{found.exact_steps:6d} {1e3 * seconds:6.2f} {seconds / plain:12.2f}")  # fmt: skip


if __name__ == "__main__":
    main()
