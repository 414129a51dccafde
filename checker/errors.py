"""Everything that can stop a run, drawn once.

    WithstandError                 exit status of the run
    |-- InputError            2    a file that cannot be used: path, line, found, expected, remedy
    |-- ArgumentError         2    the command line or an API argument cannot be used
    `-- PluginError           2    two plugins clash, or one does not have the shape its door asks for

A rule that raises is not in the tree: the engine turns it into an open verdict and ends the run with 3.
"""

from __future__ import annotations

from checker.neutral import neutral


class WithstandError(Exception):
    """Base of every message a user can act on; `status` is the exit status it leads to."""

    status = 2


class ArgumentError(WithstandError):
    """An argument that cannot be used; the message says what is accepted."""


class PluginError(WithstandError):
    """A plugin that clashes with another or does not have the shape its door asks for."""


class InputError(WithstandError):
    """One unusable place in one file.

    path: as the user wrote it. line: 1-based, 0 when the file as a whole is meant. what: what is wrong.
    found / expected / remedy: short phrases, each may be empty.
    """

    def __init__(self, path: str, what: str, *, line: int = 0, found: str = "", expected: str = "", remedy: str = ""):
        self.path, self.what, self.line = path, what, line
        self.found, self.expected, self.remedy = found, expected, remedy
        super().__init__(self.__str__())

    def __str__(self) -> str:
        place = neutral(self.path) + (f":{self.line}" if self.line else "")
        said = [f"{place}: {neutral(self.what)}"]
        if self.found:
            said.append(f"found {neutral(self.found, limit=80)}")
        if self.expected:
            said.append(f"expected {neutral(self.expected, limit=300)}")
        return "; ".join(said) + (f". {neutral(self.remedy, limit=300)}" if self.remedy else "")
