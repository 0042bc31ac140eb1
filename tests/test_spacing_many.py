"""Many projects that keep from one another: each is read once, and there is an end to how many."""

from __future__ import annotations

import pytest
from test_spacing_files import LOWER

import tautwise as tw
from tautwise import others
from tautwise.errors import InputError

BARE = LOWER[: LOWER.index("[[limit]]")]


def keeping_from(names) -> str:
    """A project with a spacing from each of the files."""
    limits = [
        f'[[limit]]\nid = "s{number}"\nkind = "spacing"\nother = "{name}"\nleast = "1 m"\n'
        f'shift = {{ elevation = "{5 + number} m" }}\n'
        for number, name in enumerate(names)
    ]
    return BARE + "".join(limits)


@pytest.fixture
def reads(monkeypatch):
    """The names of the files that are read for spacings."""
    read = others.read_project
    names = []

    def counted(name, *more):
        names.append(name)
        return read(name, *more)

    monkeypatch.setattr(others, "read_project", counted)
    return names


def test_each_project_of_a_mesh_is_read_once(tmp_path, reads):
    """Five layers of three, each keeping from all of the next: 3 + 9 + 27 + 81 paths lead to twelve files."""
    for layer in range(5):
        below = [f"{layer + 1}_{j}.taut.toml" for j in range(3)] if layer < 4 else []
        for i in range(3):
            (tmp_path / f"{layer}_{i}.taut.toml").write_text(keeping_from(below))
    project = tw.load(tmp_path / "0_0.taut.toml")
    assert len(reads) == len(set(reads)) == 12
    assert len(project.others) == 3
    deep = project.others[0].others[0].others[0]
    assert deep is project.others[2].others[1].others[0]
    assert len({source.name for source in project._document.sources}) == 13
    assert project.input_sha256 != project.others[0].input_sha256
    assert tw.load(tmp_path / "0_0.taut.toml").input_sha256 == project.input_sha256  # nothing is remembered for later


def test_what_is_wrong_with_a_project_that_many_keep_from_is_said_once(tmp_path):
    (tmp_path / "a.taut.toml").write_text(keeping_from(["b.taut.toml", "c.taut.toml", "d.taut.toml"]))
    for name in "bc":
        (tmp_path / f"{name}.taut.toml").write_text(keeping_from(["d.taut.toml"]))
    (tmp_path / "d.taut.toml").write_text(BARE.replace('weight = "3 N/m"', 'weight = "heavy"'))
    with pytest.raises(InputError) as caught:
        tw.load(tmp_path / "a.taut.toml")
    assert [fault.path for fault in caught.value.faults] == ["line.weight"]


def test_there_is_an_end_to_how_many(tmp_path, monkeypatch, reads):
    monkeypatch.setattr(others, "OTHERS_MOST", 4)
    names = [f"{number}.taut.toml" for number in range(6)]
    for name in names:
        (tmp_path / name).write_text(BARE)
    (tmp_path / "all.taut.toml").write_text(keeping_from(names))
    with pytest.raises(InputError) as caught:
        tw.load(tmp_path / "all.taut.toml")
    (fault,) = caught.value.faults
    assert "too many projects that keep from one another: at most 4 are read" in str(fault)
    assert fault.path == "limit.s4.other"
    assert len(reads) == 4
