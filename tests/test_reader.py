"""Project files as text: lines of keys, caps, includes, ground profiles."""

from __future__ import annotations

import hashlib
import json
import os
import time
import tomllib

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tautwise.errors import Fault, InputError
from tautwise.keylines import KEY_LENGTH_MOST, NESTING_MOST, KeyLines, TooMuch, scan
from tautwise.model import load
from tautwise.profile import csv_ground
from tautwise.reader import Document, read_project


def faults_of(call, *arguments):
    with pytest.raises(InputError) as caught:
        call(*arguments)
    return caught.value.faults


# --- lines of keys

SAMPLE = '''\
format = "tautwise 1"   # a comment with [brackets] = "and quotes"

[line]
"quoted key" = 1
'literal.key' = 2
a.b.c = 3
text = """
several # lines
= [ here
"""
raw = \'\'\'
x = 1\'\'\'
points = [
  ["0 m", "1 m"],   # first

  ["2 m",
   "3 m"],
]
inline = { one = 1, two = { three = [ 1, 2 ] } }
when = 1979-05-27 07:32:00

[[support]]
name = "A"
  [support.capacity]
  along = "1 kN"
[[support]]
name = "B \\" # no comment"
[[support.load]]
x = 1
[[support.load]]
x = 2
'''


@pytest.mark.parametrize(
    ("path", "line"),
    [
        (("format",), 1),
        (("line",), 3),
        (("line", "quoted key"), 4),
        (("line", "literal.key"), 5),
        (("line", "a", "b", "c"), 6),
        (("line", "text"), 7),
        (("line", "raw"), 11),
        (("line", "points"), 13),
        (("line", "points", 0), 14),
        (("line", "points", 1), 16),
        (("line", "points", 1, 1), 17),
        (("line", "inline", "two", "three", 1), 19),
        (("line", "when"), 20),
        (("support",), 22),
        (("support", 0, "name"), 23),
        (("support", 0, "capacity", "along"), 25),
        (("support", 1), 26),
        (("support", 1, "name"), 27),
        (("support", 1, "load", 0, "x"), 29),
        (("support", 1, "load", 1), 30),
        (("support", 1, "load", 1, "x"), 31),
        (("support", 1, "absent", "deep"), 26),
        (("absent",), 1),
    ],
)
def test_each_key_has_its_line(path, line):
    tomllib.loads(SAMPLE)
    assert KeyLines(SAMPLE)[path] == line


def paths_in(value, at=()):
    items = value.items() if isinstance(value, dict) else enumerate(value) if isinstance(value, list) else ()
    for key, part in items:
        yield (*at, key)
        yield from paths_in(part, (*at, key))


def test_every_parsed_path_is_found():
    assert set(paths_in(tomllib.loads(SAMPLE))) <= set(scan(SAMPLE))


KEYS = st.text(alphabet="ab. \"'\\#=[]é\t", min_size=1, max_size=6)
SCALARS = st.one_of(st.integers(-99, 99), st.booleans(), st.text(alphabet="ab\"\\#=[]{},\n'", max_size=12))


def basic(text):
    return json.dumps(text, ensure_ascii=True)


def inline(value, breaks):
    if isinstance(value, dict):
        return "{ " + ", ".join(f"{basic(key)} = {inline(part, False)}" for key, part in value.items()) + " }"
    if isinstance(value, list):
        gap = "\n" if breaks else " "
        return "[" + gap + ("," + gap).join(inline(part, breaks) for part in value) + gap + "]"
    return basic(value)


VALUES = st.recursive(SCALARS, lambda inner: st.lists(inner, max_size=3), max_leaves=6)


@given(st.dictionaries(KEYS, VALUES, max_size=6))
def test_lines_of_drawn_tables(table):
    rows, expected = ["[top]"], {}
    for key, value in table.items():
        expected[("top", key)] = sum(row.count("\n") + 1 for row in rows) + 1
        rows.append(f"{basic(key)} = {inline(value, True)}  # [x] = 'y'")
    text = "\n".join(rows)
    assert tomllib.loads(text) == {"top": table}
    found = scan(text)
    assert {path: found[path] for path in expected} == expected
    assert set(paths_in({"top": table})) <= set(found)


@given(st.text(alphabet="ab.=[]{}\"'#\n ,1\\", max_size=80))
def test_no_text_breaks_the_scanner(text):
    found = scan(text)
    try:
        tables = tomllib.loads(text)
    except tomllib.TOMLDecodeError:
        return
    assert set(paths_in(tables)) <= set(found)


# --- caps, before the parser


@pytest.mark.parametrize(
    ("text", "problem"),
    [
        ("a." * 20_000 + "b = 1", "a key of more than"),
        ("a" * 40_000 + " = 1", "a key of more than"),
        ("[" + "a." * 20_000 + "b]", "a key of more than"),
        ("a = " + "[" * 10_000, "nested more than"),
        ("a = " + "[" * 10_000 + "]" * 10_000, "nested more than"),
        ("a = " + "{a = " * 10_000, "nested more than"),
        ("a = " + "9" * 5000, "a number of more than"),
        ('a = "' + "x" * 50_000 + '"', "a text of more than"),
        ('a = """' + 'x"' * 50_000 + '"""', "a text of more than"),
    ],
)
def test_what_is_too_much_is_refused_at_once(tmp_path, text, problem):
    file = tmp_path / "big.toml"
    file.write_text("# first\n" + text)
    started = time.perf_counter()
    (fault,) = faults_of(read_project, file)
    assert time.perf_counter() - started < 1.0
    assert fault.line == 2
    assert problem in fault.problem


def test_the_caps_leave_room():
    deep = "a = " + "[" * NESTING_MOST + "]" * NESTING_MOST
    assert scan(deep)
    with pytest.raises(TooMuch):
        scan("a = [" + deep[4:] + "]")
    assert scan("a" * KEY_LENGTH_MOST + " = 1")


def test_a_file_that_is_too_large(tmp_path):
    file = tmp_path / "big.toml"
    file.write_text("#" * 1_000_001)
    (fault,) = faults_of(read_project, file)
    assert "too large" in fault.problem
    assert "1 MB" in fault.problem


# --- files that are none


@pytest.mark.parametrize(
    ("data", "line", "problem"),
    [
        (b"", 1, "the file is empty"),
        (b" \n\n", 1, "the file is empty"),
        (b"# only a comment\n", 1, "holds no key"),
        (b"a = 1\nb = \0\n", 2, "not a text file"),
        (b"a = 1\nb = '\xff\xfe'\n", 2, "not a text file"),
        (b"\x7fELF\x02\x01\x01\0\0\0", 1, "not a text file"),
        (b'format = "tautwise 2"\n', 1, "does not read"),
        (b"\nformat = 3\n", 2, "is not a format"),
    ],
)
def test_files_that_are_no_project(tmp_path, data, line, problem):
    file = tmp_path / "x.toml"
    file.write_bytes(data)
    fault, *_ = [each for each in faults_of(load, file) if problem in each.problem]
    assert (fault.file, fault.line) == (str(file), line)


def test_no_file_folder_and_pipe(tmp_path):
    assert faults_of(read_project, tmp_path / "none.toml")[0].problem == "there is no such file"
    assert faults_of(read_project, tmp_path)[0].problem == "this is not a file"
    os.mkfifo(tmp_path / "pipe")
    assert faults_of(read_project, tmp_path / "pipe")[0].problem == "this is not a file"
    assert "cannot be read" in faults_of(read_project, "nul\0name")[0].problem


@pytest.mark.parametrize(
    ("text", "line", "path", "problem", "example"),
    [
        ("[line]\ndiameter = 16 mm\n", 3, "line.diameter", "16 mm without quotes", '"16 mm"'),
        ("[line]\nx = [1,\n", 3, "line.x", "this is not TOML", ""),
        ("a = 1\na = 2\n", 3, "", "second time", ""),
        ("[a]\n[a]\n", 3, "", "stands twice", ""),
        ("[line\n", 2, "", "this is not TOML", ""),
        ('a = "x\n', 2, "a", "does not end on its line", ""),
    ],
)
def test_syntax_faults(tmp_path, text, line, path, problem, example):
    file = tmp_path / "x.toml"
    file.write_text('format = "tautwise 1"\n' + text)
    (fault,) = faults_of(read_project, file)
    assert (fault.line, fault.path, fault.example) == (line, path, example)
    assert problem in fault.problem


def test_windows_text_is_read(tmp_path):
    file = tmp_path / "x.toml"
    file.write_bytes(b'\xef\xbb\xbfformat = "tautwise 1"\r\n[line]\r\nname = "x"\r\n')
    document = read_project(file)
    assert document.where(("line", "name")) == (str(file), 3)


# --- include


def write(folder, **files):
    for name, text in files.items():
        (folder / f"{name}.toml").write_text(text)
    return folder / "main.toml"


def test_included_tables_are_merged_and_arrays_follow(tmp_path):
    main = write(
        tmp_path,
        main='format = "tautwise 1"\ninclude = ["more.toml"]\n[line]\nname = "own"\n[[condition]]\nname = "hot"\n',
        more='[line]\nname = "theirs"\narea = "1 mm^2"\n[[condition]]\nname = "cold"\n\n[[condition]]\nname = "ice"\n',
    )
    document = read_project(main)
    assert document.tables["line"] == {"name": "own", "area": "1 mm^2"}
    assert [condition["name"] for condition in document.tables["condition"]] == ["hot", "cold", "ice"]
    more = str(tmp_path / "more.toml")
    assert document.where(("line", "name")) == (str(main), 4)
    assert document.where(("line", "area")) == (more, 3)
    assert document.where(("condition", 0, "name")) == (str(main), 6)
    assert document.where(("condition", 2, "name")) == (more, 8)
    assert document.where(("condition", 2, "temperature")) == (more, 7)
    assert [source.name for source in document.sources] == [str(main), more]


@pytest.mark.parametrize(
    ("include", "problem"),
    [
        ('"main.toml"', "the file includes itself"),
        ('"./sub/../main.toml"', "the file includes itself"),
        ('"none.toml"', "there is no file"),
        ('"../outside.toml"', "outside the project's folder"),
        ('"/etc/hostname"', "outside the project's folder"),
        ("3", "is no file name"),
        ('["", "x.toml"]', "is no file name"),
        ('["leaf.toml", "leaf.toml"]', "is included twice"),
        ('"link.toml"', "outside the project's folder"),
    ],
)
def test_includes_that_are_refused(tmp_path, include, problem):
    folder = tmp_path / "project"
    (folder / "sub").mkdir(parents=True)
    (tmp_path / "outside.toml").write_text("x = 1\n")
    (folder / "link.toml").symlink_to(tmp_path / "outside.toml")
    main = write(folder, main=f'format = "tautwise 1"\ninclude = {include}\n', leaf="[line]\n")
    fault, *_ = faults_of(load, main)
    assert (fault.file, fault.line) == (str(main), 2)
    assert problem in fault.problem
    assert fault.example == 'include = "loads.toml"'


def test_a_circle_of_includes(tmp_path):
    main = write(
        tmp_path,
        main='format = "tautwise 1"\ninclude = "a.toml"\n',
        a='include = "b.toml"\n',
        b='\ninclude = "a.toml"\n',
    )
    (fault,) = faults_of(load, main)
    assert (fault.file, fault.line) == (str(tmp_path / "b.toml"), 2)
    assert "circle" in fault.problem


def test_a_chain_of_includes_ends(tmp_path):
    for number in range(40):
        write(tmp_path, **{f"f{number}": f'include = "f{number + 1}.toml"\n'})
    main = write(tmp_path, main='format = "tautwise 1"\ninclude = "f0.toml"\n')
    (fault,) = faults_of(load, main)
    assert "too many included files" in fault.problem


def test_a_fault_in_an_included_file_names_it(tmp_path):
    main = write(tmp_path, main='format = "tautwise 1"\ninclude = "a.toml"\n', a="x = 1\ny = = 2\n")
    (fault,) = faults_of(load, main)
    assert (fault.file, fault.line) == (str(tmp_path / "a.toml"), 2)


# --- the ground profile


def ground(folder, text):
    (folder / "ground.csv").write_bytes(text.encode() if isinstance(text, str) else text)
    document = Document({}, str(folder / "x.toml"), folder, {("ground", "profile"): (str(folder / "x.toml"), 4)})
    return csv_ground(document, "ground.csv")


@pytest.mark.parametrize(
    ("text", "stations", "elevations"),
    [
        ("station_m,elevation_m\n0,1\n10.5,-2\n", (0.0, 10.5), (1.0, -2.0)),
        ("elevation_m, station_m\r\n1, 0\r\n-2, 1e1\r\n\r\n", (0.0, 10.0), (1.0, -2.0)),
        ("\ufeffstation_m,elevation_m\n0,1\n1,2", (0.0, 1.0), (1.0, 2.0)),
        ('"station_m","elevation_m"\n"0","1"\n"1","2"\n', (0.0, 1.0), (1.0, 2.0)),
        ("station_ft,elevation_ft\n0,10\n100,20\n", (0.0, 30.48), (3.048, 6.096)),
    ],
)
def test_profiles(tmp_path, text, stations, elevations):
    profile, source = ground(tmp_path, text)
    assert profile.stations_m == pytest.approx(stations, rel=1e-15)
    assert profile.elevations_m == pytest.approx(elevations, rel=1e-15)
    data = (tmp_path / "ground.csv").read_bytes()
    assert source.sha256 == hashlib.sha256(data).hexdigest()


@pytest.mark.parametrize(
    ("text", "line", "problem"),
    [
        ("", 1, "empty"),
        (b"station_m,elevation_m\n0,\0\n", 2, "not a text file"),
        ("station,elevation\n0,1\n1,2\n", 1, "did you mean"),
        ("station_m;elevation_m\n0;1\n", 1, "the header is"),
        ("station_m,station_ft\n0,1\n", 1, "the header is"),
        ("0,1\n1,2\n", 1, "the header is"),
        ('station_m,elevation_m\n0,1\n10,"2\n20,3\n30,"4\n', 3, "a quote that is not closed"),
        ('station_m,elevation_m\n0,1\n10,2"\n20,3\n', 3, "a quote that is not closed"),
        ("station_m,elevation_m\n0,1\n0,2\n", 3, "does not lie beyond"),
        ("station_m,elevation_m\n0,1\n5,2\n4,2\n", 4, "does not lie beyond"),
        ("station_m,elevation_m\n0,1\n\n\n5,1_0\n", 5, "no underscores"),
        ("station_m,elevation_m\n0,1\n5,nan\n", 3, "must be finite"),
        ("station_m,elevation_m\n0,1\n5,\n", 3, "an empty value"),
        ("station_m,elevation_m\n0,1\n5,2,3\n", 3, "3 values"),
        ("station_m,elevation_m\n0,1\n１,2\n", 3, "is not a number"),
        ("station_m,elevation_m\n0,1\n", 1, "the profile has 1 points"),
        ("station_m,elevation_m\n", 1, "the profile has 0 points"),
    ],
)
def test_profiles_that_are_refused_name_their_own_line(tmp_path, text, line, problem):
    fault = faults_of(ground, tmp_path, text)[0]
    assert (fault.file, fault.line) == (str(tmp_path / "ground.csv"), line)
    assert problem in fault.problem


def test_all_faults_of_a_profile_come_at_once(tmp_path):
    faults = faults_of(ground, tmp_path, "station_m,elevation_m\n0,x\n5,1\n4,2\n9\n")
    assert [fault.line for fault in faults] == [2, 4, 5]


def test_many_faults_of_a_profile_are_counted(tmp_path):
    faults = faults_of(ground, tmp_path, "station_m,elevation_m\n" + "x,1\n" * 500)
    assert len(faults) == 21
    assert "and 480 more faults" in faults[-1].problem


def test_a_long_profile_is_read_in_time(tmp_path):
    rows = "".join(f"{number},{number % 7}\n" for number in range(100_000))
    profile, _ = ground(tmp_path, "station_m,elevation_m\n" + rows)
    assert len(profile.stations_m) == 100_000


@given(st.text(alphabet='0123456789.,e-"\n', max_size=60))
def test_no_text_breaks_the_profile_reader(tmp_path_factory, text):
    folder = tmp_path_factory.mktemp("csv")
    try:
        profile, _ = ground(folder, "station_m,elevation_m\n" + text)
    except InputError as error:
        assert all(isinstance(fault, Fault) and fault.line for fault in error.faults)
        return
    assert len(profile.stations_m) == len([line for line in text.split("\n") if line.strip()])


def test_elevation_between_the_points(tmp_path):
    profile, _ = ground(tmp_path, "station_m,elevation_m\n0,0\n10,5\n20,0\n")
    assert [profile.elevation(station) for station in (0.0, 4.0, 10.0, 15.0, 20.0)] == [0.0, 2.0, 5.0, 2.5, 0.0]


def test_faults_of_includes_hide_no_others(tmp_path):
    main = write(
        tmp_path,
        main='format = "tautwise1"\ninclude = ["none.toml", "bad.toml", "good.toml"]\n[line]\nwieght = "1 N/m"\n',
        bad="x = = 1\n",
        good='include = "gone.toml"\n[stringing]\ntemperature = "x"\n',
    )
    problems = [(os.path.basename(fault.file), fault.problem) for fault in faults_of(load, main)]
    for file, words in [
        ("main.toml", '"tautwise1" is a format that this version does not read'),
        ("main.toml", 'there is no file "none.toml"'),
        ("bad.toml", "not TOML"),
        ("good.toml", 'there is no file "gone.toml"'),
        ("good.toml", '"x"'),
        ("main.toml", "unknown key"),
    ]:
        assert [problem for name, problem in problems if name == file and words in problem], (file, words, problems)


def test_a_missing_format_is_told_beside_a_missing_include(tmp_path):
    main = write(tmp_path, main='include = "none.toml"\n[line]\nweight = "1 N/m"\n')
    assert [fault.path for fault in faults_of(load, main)] == ["format", "include"]


def test_a_newer_format_is_read_no_further(tmp_path):
    main = write(tmp_path, main='format = "tautwise 2"\n[line]\nwieght = "1 N/m"\n')
    (fault,) = faults_of(load, main)
    assert "does not read" in fault.problem


@pytest.mark.parametrize("name", ["a\\u0000b", "a\\u001b[31m.toml"])
def test_an_include_that_cannot_be_printed(tmp_path, name):
    main = write(tmp_path, main=f'format = "tautwise 1"\ninclude = "{name}"\n')
    (fault,) = [each for each in faults_of(load, main) if each.path == "include"]
    assert "cannot be printed" in fault.problem
    assert fault.example == 'include = "loads.toml"'


def test_includes_that_are_no_files(tmp_path):
    (tmp_path / "folder").mkdir()
    os.mkfifo(tmp_path / "pipe")
    main = write(tmp_path, main='format = "tautwise 1"\ninclude = ["folder", "pipe"]\n')
    faults = [each for each in faults_of(load, main) if each.path.startswith("include")]
    assert [(each.path, each.line) for each in faults] == [("include[0]", 2), ("include[1]", 2)]
    assert all("is not a file" in each.problem for each in faults)
    assert all(each.example == 'include = "loads.toml"' for each in faults)
