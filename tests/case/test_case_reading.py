"""Reading whole files: syntax, sections, unknown keys, many mistakes at once, and where a message points."""

import pickle
import subprocess
import sys
from pathlib import Path

import pytest
from case.case_examples import case_text, folder_with_inputs, mistakes, read, without_line

from swe.case import parse_case, place_of, read_case
from swe.errors import CaseError, FileError

ROOT = Path(__file__).resolve().parents[2]
SECTIONS = ", ".join(f"[{name}]" for name in "basin depth mesh earth drag wind pressure storm tide".split())
SECTIONS += ", [[open]], [start], [time], [method], [subdomains], [output], [checkpoint], [[station]]"
MANY = """\
titel = "A misspelt key"

[basin]
surface = "plan"
coastline = "coast.geojson"
[depth]
constant = "40 m"
least = 50

[msh]
spacing = "4 km"

[earth]
rotation = "none"
latitude = 54
[time]
begin = 2031-01-01
duration = "1 d"
step = "7 min"
[method]
stepper = "one-stage"
largest_basis = 30.5

[subdomains]
overlap = true
mismatch_tolerance = "0.1 mm"
[output]
fields_every = "1 h"
stations_every = "14 min"
[[station]]
name = "pier"
x = 1
[[station]]
name = "pier"
x = 1
y = "4 seconds"
"""


def test_all_mistakes_of_a_file_come_at_once_in_its_order(tmp_path):
    assert [mistake.split(": ")[0] + " " + without_line(mistake).split(":")[0] for mistake in mistakes(tmp_path, MANY)] == [
        'case.toml:1 titel = "A misspelt key"',
        'case.toml:4 [basin] surface = "plan"',
        "case.toml:8 [depth] least = 50",
        "case.toml:10 [msh]",
        "case.toml:15 [earth] latitude = 54",
        "case.toml:17 [time] begin = 2031-01-01",
        'case.toml:18 [time] duration = "1 d"',
        "case.toml:20 [method] action_tolerance",
        "case.toml:22 [method] largest_basis = 30.5",
        "case.toml:25 [subdomains] overlap = true",
        'case.toml:28 [output] fields_every = "1 h"',
        "case.toml:30 [station 1] y",
        'case.toml:34 [station 2] name = "pier"',
        'case.toml:36 [station 2] y = "4 seconds"',
    ]


def test_the_error_is_one_message_a_line(tmp_path):
    with pytest.raises(CaseError) as caught:
        read(tmp_path, MANY)
    assert str(caught.value).splitlines() == caught.value.mistakes
    assert caught.value.exit_code == 2


@pytest.mark.parametrize(
    ("tail", "expected"),
    [
        ("[wnd]\neast = 0.1\n", f"[wnd]: unknown section; allowed: {SECTIONS}; did you mean [wind]?"),
        ("[Wind]\neast = 0.1\n", f"[Wind]: unknown section; allowed: {SECTIONS}; did you mean [wind]?"),
        ("[[stations]]\nname = 'a'\n", f"[[stations]]: unknown section; allowed: {SECTIONS}; did you mean [[station]]?"),
        ("[sand]\n", f"[sand]: unknown section; allowed: {SECTIONS}"),
        ("[station]\nname = 'a'\n", "[station]: not an array of tables; write [[station]] above each station"),
        ("[[wind]]\neast = 0.1\n", "[[wind]]: a section that stands once only; write [wind]"),
        ("[drag]\nbotom = 0.1\n", "[drag] botom = 0.1: unknown key; allowed: bottom, manning, viscosity; did you mean bottom?"),
        ("[drag]\nnorth = 0.1\n", "[drag] north = 0.1: unknown key; allowed: bottom, manning, viscosity; it is a key of [wind]"),
        (
            "[drag]\ny = 0.1\n",
            "[drag] y = 0.1: unknown key; allowed: bottom, manning, viscosity; it is a key of [start] and [[station]]",
        ),
        ('[drag]\n"a\\nb" = 0.1\n', '[drag] "a\\nb" = 0.1: unknown key; allowed: bottom, manning, viscosity'),
        ("[drag]\nquality = 0.1\n", "[drag] quality = 0.1: unknown key; allowed: bottom, manning, viscosity"),
        (
            "[drag]\nmore.bottom = 1\n",
            "[drag] more = {bottom = 1}: unknown key; allowed: bottom, manning, viscosity",
        ),
        (
            "[drag.bottom]\nx = 1\n",
            "[drag] bottom = {x = 1}: a table, but a plain number is needed; allowed: number from 0 to 0.1",
        ),
    ],
)
def test_message_of_an_unknown_name(tmp_path, tail, expected):
    assert [without_line(mistake) for mistake in mistakes(tmp_path, case_text(tail=tail))] == [expected]


@pytest.mark.parametrize(
    ("head", "expected"),
    [
        ("wind = 5\n", "case.toml:1: [wind]: a whole number, but a section is needed; write [wind] and its keys below"),
        ("station = []\n", "case.toml:1: [station]: not an array of tables; write [[station]] above each station"),
        ("east = 0.1\n", f"case.toml:1: east = 0.1: unknown key; allowed: title, {SECTIONS}; it is a key of [wind]"),
        ("titles = 3\n", f"case.toml:1: titles = 3: unknown key; allowed: title, {SECTIONS}; did you mean title?"),
    ],
)
def test_message_of_a_wrong_top_level(tmp_path, head, expected):
    assert mistakes(tmp_path, head + case_text()) == [expected]


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        (
            'title = "a"\n[mesh]\nspacing = 4 km # fine\n',
            "case.toml:3:13: not TOML: expected newline or end of document after a statement; "
            'the line reads: spacing = 4 km # fine; write quantities in quotes: "4 km"',
        ),
        (
            "title = square\n",
            'case.toml:1:9: not TOML: invalid value; the line reads: title = square; write text in quotes: "square"',
        ),
        (
            "[method]\nrefresh_depth = True\n",
            "case.toml:2:17: not TOML: invalid value; the line reads: refresh_depth = True; write true",
        ),
        (
            '[basin]\ncoastline = "in\\coast.geojson"\n',
            "case.toml:2:18: not TOML: unescaped '\\' in a string; the line reads: coastline = \"in\\coast.geojson\"; "
            "write / between folders, or put the text in single quotes",
        ),
        (
            "[mesh]\nseed = 1\nseed = 2\n",
            "case.toml:3:9: not TOML: cannot overwrite a value; the line reads: seed = 2; "
            "the key or table stands there twice: keep one",
        ),
        (
            "[mesh]\n[mesh]\n",
            "case.toml:2:6: not TOML: cannot declare ('mesh',) twice; the line reads: [mesh]; "
            "the key or table stands there twice: keep one",
        ),
        ('a = """never\nends\n', "case.toml:3: not TOML: unterminated string"),
        ("a = 1\n\n[b\n", "case.toml:3:3: not TOML: expected ']' at the end of a table declaration; the line reads: [b"),
    ],
)
def test_message_of_a_syntax_error(tmp_path, text, expected):
    """The words after "not TOML" and the column are those of Python's tomllib (3.11); the rest is ours."""
    assert mistakes(tmp_path, text) == [expected]


def test_message_of_too_deep_nesting(tmp_path):
    expected = "case.toml: lists or tables nested too deep; allowed: sections with keys; take the nesting out"
    assert mistakes(tmp_path, f"a = {'[' * 5000}") == [expected]


def test_a_file_that_is_not_utf8(tmp_path):
    path = tmp_path / "case.toml"
    path.write_bytes('title = "ok"\n# Größe\n'.encode("latin-1"))
    with pytest.raises(CaseError) as caught:
        read_case(path)
    assert caught.value.mistakes == [f"{path}:2: byte 0xf6 is not UTF-8; allowed: text in UTF-8; save the file in that encoding"]


def test_a_file_that_does_not_exist(tmp_path):
    path = tmp_path / "case.toml"
    with pytest.raises(FileError) as caught:
        read_case(path)
    assert str(caught.value) == (
        f"{path}: the case file cannot be read: No such file or directory; allowed: the path of a TOML file; "
        f"a new one is made by: swe new {path}"
    )


def test_an_empty_file_names_all_that_is_needed(tmp_path):
    needed = [without_line(mistake).split(":")[0] for mistake in mistakes(tmp_path, "")]
    assert needed == [
        "title",
        "[basin] surface",
        "[basin] coastline",
        "[depth] least",
        "[earth] rotation",
        "[time] begin",
        "[time] duration",
        "[time] step",
        "[method] stepper",
        "[output] fields_every",
        "[depth] constant",
        "[mesh] spacing",
    ]


@pytest.mark.parametrize(
    ("text", "line"),
    [
        ("drag.bottom = 1\n{}", 1),
        ("{}[drag]\n\n# why\nbottom = 1\n", 4),
        ("{}[drag]\n'bottom' = 1\n", 2),
        ('{}["drag"]\n"bot\\u0074om" = 1\n', 2),
        ("drag = {{ viscosity = 0, bottom = 1 }}\n{}", 1),
        ("{}[ drag ]\nviscosity = '''\n0 m2/s'''\nbottom = 1", 4),
    ],
)
def test_lines_of_a_key_in_several_layouts(tmp_path, text, line):
    whole = text.format(case_text())
    offset = 0 if text.startswith("drag") else case_text().count("\n")
    found = [mistake for mistake in mistakes(tmp_path, whole) if "bottom" in mistake.split(";")[0]]
    assert found == [f"case.toml:{offset + line}: [drag] bottom = 1: above the range; allowed: number from 0 to 0.1"]


def test_a_case_knows_where_it_came_from(tmp_path):
    path = folder_with_inputs(tmp_path) / "strait of nowhere.toml"
    path.write_bytes(
        b"\xef\xbb\xbf" + case_text({"output.stations_every": '"1 h"'}, "[[station]]\nname = 'a'\nx = 1\ny = 2").encode()
    )
    case = read_case(path)
    assert (case.path, case.folder, case.name) == (path, tmp_path, "strait of nowhere")
    assert case.text == path.read_bytes().decode("utf-8-sig")
    assert case.where("mesh", "spacing") == f"{path}:9: [mesh] spacing"
    assert case.where("mesh", "seed") == f"{path}:8: [mesh] seed"
    assert case.where("wind", "east") == f"{path}: [wind] east"
    assert case.where("title") == f"{path}:1: title"
    assert case.where("station", 0, "x").endswith(": [station 1] x") and case.where("station", 0).endswith(": [station 1]")
    assert case.given("mesh", "spacing") and not case.given("mesh", "seed")
    assert place_of(case.stations[0]) == (1.0, 2.0)


def test_a_relative_path_is_as_good(tmp_path, monkeypatch):
    (folder_with_inputs(tmp_path) / "case.toml").write_text(case_text())
    monkeypatch.chdir(tmp_path)
    assert read_case("case.toml") == read_case(tmp_path / "case.toml")
    assert read_case("case.toml").path == tmp_path / "case.toml"


def test_a_case_is_frozen_and_can_be_sent_to_other_ranks(tmp_path):
    case = read(tmp_path, case_text())
    with pytest.raises(AttributeError):
        case.time.step = 1.0
    assert pickle.loads(pickle.dumps(case)) == case


def test_equal_settings_make_equal_cases(tmp_path):
    folder_with_inputs(tmp_path)
    case = parse_case(case_text(), tmp_path / "a.toml")
    assert case == parse_case("# comment\n" + case_text({"mesh.spacing": "4000"}), tmp_path / "b.toml")
    assert case != parse_case(case_text({"mesh.spacing": "4001"}), tmp_path / "a.toml")


def test_the_room_imports_the_standard_library_and_nothing_else_of_the_program():
    """So it is fast to import."""
    script = (
        "import sys; before = set(sys.modules); import swe.case.reference, swe.case.writing; "
        "print(*sorted(set(sys.modules) - before))"
    )
    found = subprocess.run([sys.executable, "-c", script], cwd=ROOT, capture_output=True, text=True, check=True).stdout.split()
    assert "swe.case.reading" in found
    foreign = {name.split(".")[0] for name in found} - set(sys.stdlib_module_names)
    assert foreign == {"swe"}
    assert {name.split(".")[1] for name in found if name.startswith("swe.")} == {"case", "errors", "constants"}
