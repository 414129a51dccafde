"""What a writer is: the shape behind the door `withstand.writers`."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from checker.model.report import Report, Reports


@dataclass(frozen=True, slots=True)
class Writer:
    """One output form. form: its name after `--format`. write: the whole output as bytes, the same for the same report."""

    form: str
    write: Callable[[Report | Reports], bytes]
