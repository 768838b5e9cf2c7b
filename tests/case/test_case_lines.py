"""Lines of keys in odd but valid layouts. Source of the syntax: TOML v1.0.0."""

import tomllib

import pytest

from swe.case.lines import find_lines, line_of

ODD = '''# comment with = and [brackets]
title = """two
lines with [mesh] and "quotes"""" # text may end with a quote
"quoted \\u0041 key" . 'lit.eral' .bare = 1
   [ mesh ] # a table
grade_by = [ # over several lines
  "coast", # ] no end yet
  "]",
  { inner = 3, deep.er = [
    4] },
]
inline = { text = '}', none = {}, list = [] }
begin = 2031-01-01 00:00:00 # a date with a blank
[[station]]
name = "a"
[station.extra]
note = \'\'\'it's
''quoted'\'\'\'

[[ station ]]

name = """"""
[depth.more]
least = 5
[depth]
constant = 2'''


def all_paths(value, path=()):
    """Return the paths of everything in read TOML data."""
    members = value.items() if isinstance(value, dict) else enumerate(value) if isinstance(value, list) else ()
    return {path} | {found for name, item in members for found in all_paths(item, (*path, name))}


def test_lines_in_an_odd_layout():
    assert find_lines(ODD) == {
        ("title",): 2,
        ("quoted A key",): 4,
        ("quoted A key", "lit.eral"): 4,
        ("quoted A key", "lit.eral", "bare"): 4,
        ("mesh",): 5,
        ("mesh", "grade_by"): 6,
        ("mesh", "grade_by", 0): 7,
        ("mesh", "grade_by", 1): 8,
        ("mesh", "grade_by", 2): 9,
        ("mesh", "grade_by", 2, "inner"): 9,
        ("mesh", "grade_by", 2, "deep"): 9,
        ("mesh", "grade_by", 2, "deep", "er"): 9,
        ("mesh", "grade_by", 2, "deep", "er", 0): 10,
        ("mesh", "inline"): 12,
        ("mesh", "inline", "text"): 12,
        ("mesh", "inline", "none"): 12,
        ("mesh", "inline", "list"): 12,
        ("mesh", "begin"): 13,
        ("station",): 14,
        ("station", 0): 14,
        ("station", 0, "name"): 15,
        ("station", 0, "extra"): 16,
        ("station", 0, "extra", "note"): 17,
        ("station", 1): 20,
        ("station", 1, "name"): 22,
        ("depth",): 23,
        ("depth", "more"): 23,
        ("depth", "more", "least"): 24,
        ("depth", "constant"): 26,
    }


@pytest.mark.parametrize(
    "text",
    [
        ODD,
        "",
        "# only a comment",
        "a = 1",
        "a.b = 1\na.c = 2\n[d]\n\n",
        'a = "\\"]" # "\nb = \'\\\'\nc = [[1, 2], [3]]',
        "a = [\n\n1,\n2,\n]\nb = +inf\nc = 1_000\nd = 07:32:00\n",
        "[[a]]\n[[a.b]]\nx = 1\n[[a.b]]\nx = 2\n[[a]]\n[[a.b]]\nx = 3",
        '[[a]]\n[a.b.c]\nx = """a\\\n   b"""\n[[a]]\n[a.b.c]\nx = 2',
        "a = [{ b = 1 }, { b = 2, c = { d = [ {} ] } }]",
        "\t a\t=\t1\t\n\t[\tb\t.\t'c'\t]\n",
    ],
)
def test_every_path_of_the_data_has_a_line_and_no_other(text):
    assert set(find_lines(text)) == all_paths(tomllib.loads(text)) - {()}


def test_windows_line_ends_count_once():
    assert find_lines("a = 1\r\n[b]\r\n\r\nc = '''\r\n'''\r\nd = 2\r\n") == {("a",): 1, ("b",): 2, ("b", "c"): 4, ("b", "d"): 6}


def test_a_path_without_a_line_has_that_of_the_table_around_it():
    lines = find_lines("[mesh]\nseed = 1\n")
    assert [line_of(lines, path) for path in (("mesh", "seed"), ("mesh", "file"), ("wind", "east"))] == [2, 1, 0]
