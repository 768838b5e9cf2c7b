"""Every error this program raises on purpose.

    SweError                      exit code
    |-- InputError                    2      the case file or one of its inputs is wrong
    |   |-- CaseError                 2      several mistakes of one case file, all at once
    |   `-- MeshError                 2      a mesh that cannot be built or must not be used
    |-- EnvironmentError_             3      a part of the system is missing
    |-- NumericalFailure              4      the run left the range where its numbers mean something
    |-- FileError                     5      a file or folder cannot be read or written
    `-- Stopped                       6      the run was asked to stop and saved its state

A message is one line that says four things: where (file and line, or rank, step and model time), what was
found, what is allowed, what to do.
"""

from __future__ import annotations


class SweError(Exception):
    """An expected failure; `exit_code` is what the command line returns.

    `everywhere` is True when all ranks raise the same error together; any other error ends the whole job at once,
    because the remaining ranks would wait for ever.
    """

    exit_code = 1
    everywhere = False

    def on_all_ranks(self) -> "SweError":
        """Mark this error as raised by all ranks alike and return it."""
        self.everywhere = True
        return self


class InputError(SweError):
    """The case file or an input named by it is wrong."""

    exit_code = 2


class CaseError(InputError):
    """All mistakes of one case file; `mistakes` holds one line each."""

    def __init__(self, mistakes: list[str]):
        self.mistakes = list(mistakes)
        super().__init__("\n".join(self.mistakes))


class MeshError(InputError):
    """A mesh that cannot be built from its inputs, or that fails its invariants."""


class EnvironmentError_(SweError):
    """A part of the system that the program needs is missing."""

    exit_code = 3


class NumericalFailure(SweError):
    """Non-finite values, a dry face, or no convergence; the last good state was saved where the message says."""

    exit_code = 4


class FileError(SweError):
    """A file or folder cannot be read or written."""

    exit_code = 5


class Stopped(SweError):
    """The run was asked to stop, saved its state and left."""

    exit_code = 6
