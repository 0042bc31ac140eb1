"""Lines that have passed through each other since they were strung keep no spacing."""

import pytest

import tautwise as tw

LINE = {
    "diameter": "20 mm",
    "weight": "10 N/m",
    "stiffness": "20 MN",
    "expansion": "12e-6 / K",
    "breaking_strength": "80 kN",
}


def write(folder, name, supports, pull, conditions, limits=()):
    lines = ['format = "tautwise 1"', "[line]", *(f'{key} = "{value}"' for key, value in LINE.items())]
    for number, keys in enumerate(supports):
        lines += ["[[support]]", f'name = "{name}{number}"', *(f'{key} = "{value}"' for key, value in keys.items())]
    lines += ["[stringing]", 'temperature = "15 degC"', f'horizontal_tension = "{pull}"']
    for condition, ice in conditions.items():
        lines += [
            "[[condition]]",
            f'name = "{condition}"',
            'temperature = "0 degC"',
            f'ice = {{ thickness = "{ice}", density = "900 kg/m^3" }}',
        ]
    lines += limits
    path = folder / f"{name}.taut.toml"
    path.write_text("\n".join(lines), encoding="utf-8")
    return path


LIMIT = ["[[limit]]", 'id = "sp"', 'kind = "spacing"', 'other = "U.taut.toml"', 'least = "0.6 m"']


def across(folder, ice, pull="15 kN"):
    """A lower line of 80 m at 10 m, and 1.5 m above its middle, as strung, one of 300 m that takes ice alone."""
    write(folder, "U", [{"east": "40 m", "north": "-150 m", "elevation": "18.5 m"},
                        {"east": "40 m", "north": "150 m", "elevation": "18.5 m"}], "15 kN", {"iced": ice})  # fmt: skip
    path = write(folder, "L", [{"east": "0 m", "north": "0 m", "elevation": "10 m"},
                               {"east": "80 m", "north": "0 m", "elevation": "10 m"}], pull, {"bare": "0 mm"},
                 [*LIMIT, 'other_condition = "iced"'])  # fmt: skip
    return tw.load(path)


def above(folder, ice):
    """The same in one vertical plane: two spans of 300 m, 2 m above one another."""
    for name, elevation in (("U", "22 m"), ("L", "20 m")):
        places = [{"station": "0 m", "elevation": elevation}, {"station": "300 m", "elevation": elevation}]
        conditions = {"iced": ice if name == "U" else "0 mm"}
        path = write(folder, name, places, "15 kN", conditions, LIMIT if name == "L" else ())
    return tw.load(path)


def gap(project, own, other):
    """Height of our middle above the other line's, m."""
    return (
        project.settle(own).spans[0].low_point.elevation_m
        - project.others[0].settle(other).spans[0].low_point.elevation_m
    )


@pytest.mark.parametrize("make", [across, above])
def test_lines_that_changed_places_fail_by_the_gap(tmp_path, make):
    project = make(tmp_path, "40 mm")
    row = project.vet().limits[0]
    height = gap(project, project.conditions[0].name, "iced")
    assert height > 0.6, "the lower line now hangs above"
    assert row.status == "fails"
    assert row.value == pytest.approx(-height, abs=5e-3)  # lines over one another: up to 3.1 m from the middle
    assert row.utilisation > 2.0
    assert "station" in row.place
    assert "station" in row.other_place
    assert any("passed through" in finding for finding in project.vet().files[0].findings)


@pytest.mark.parametrize("make", [across, above])
def test_lines_in_their_order_are_judged_as_before(tmp_path, make):
    project = make(tmp_path, "0 mm")
    row = project.vet().limits[0]
    assert row.status == "holds"
    assert row.value == pytest.approx(-gap(project, project.conditions[0].name, "iced"), abs=0.02)
    assert not any("passed through" in finding for finding in project.vet().files[0].findings)


def test_a_line_strung_beneath_lower_supports_is_pointed_at(tmp_path):
    """Its supports stand half a metre higher, its sag of 7.5 m takes it below: right as strung, but hardly meant."""
    assert across(tmp_path, "0 mm").vet().files[0].findings == ()
    file = tmp_path / "U.taut.toml"
    file.write_text(file.read_text(encoding="utf-8").replace("18.5 m", "10.5 m"), encoding="utf-8")
    (finding,) = tw.load(tmp_path / "L.taut.toml").vet().files[0].findings
    assert "U0 to U1 of U.taut.toml hangs" in finding
    apart = float(finding.partition("hangs ")[2].split()[0])
    assert apart == pytest.approx(10.0 - 0.53 - (10.5 - 7.5), abs=0.05)  # parabolas; arcs of 20 m taken straight: 3 cm
    assert "below L0 to L1 where they cross" in finding
    assert any("U0 to U1 of U.taut.toml hangs" in text for text in tw.load(tmp_path / "L.taut.toml").window().warnings)


def test_the_window_keeps_the_side_that_the_lines_were_strung_on(tmp_path):
    window = across(tmp_path, "40 mm").window()
    assert len(window.intervals) == 1, "no second stretch of pulls at which it would hang above the ice"
    assert (window.low.limit, window.high.limit) == (None, "sp")
