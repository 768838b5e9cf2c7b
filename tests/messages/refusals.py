"""How a refusal is tested: the same one line from `swe check` and `swe run`, with code and place, and nothing written."""

from __future__ import annotations

from pathlib import Path

from cases import Done, call

VERBS = ("check", "run")


def refused(folder: Path, code: int, *parts: str, verbs=VERBS, options=(), lines: int = 1, name="lake.toml") -> list[str]:
    """Let every verb refuse the case: exit code, `lines` lines on stderr that hold `parts` in this order, no results.

    Returns the lines, with the folder taken out of their paths.
    """
    said = {}
    for verb in verbs:
        done = call(folder, verb, name, *(options if verb == "run" else ()))
        said[verb] = plain(done, folder)
        assert done.code == code, f"{verb}: code {done.code}\n{done.out}\n{done.err}"
        assert len(said[verb]) == lines, f"{verb}: {lines} lines were expected, found\n{done.err}"
        assert "Traceback" not in done.err and done.err.endswith("\n")
        in_order("\n".join(said[verb]), *parts)
        assert not list(folder.glob("results/*/*.nc")), f"{verb} left results of a case that it refused"
        assert not list(folder.glob("results/*/in-use")), f"{verb} left its claim to the folder"
    return said[verbs[-1]]


def plain(done: Done, folder: Path) -> list[str]:
    """Return the lines on stderr without the folder's own path."""
    return done.err.replace(f"{folder}/", "").splitlines()


def in_order(text: str, *parts: str) -> None:
    """Assert that `text` holds all parts, one after the other."""
    place = 0
    for part in parts:
        found = text.find(part, place)
        assert found >= 0, f"{part!r} was expected behind {text[:place]!r} in\n{text}"
        place = found + len(part)
