"""Withstand: from a netlist and a bill of materials to isolation domains, barriers and verdicts.

import checker
report = checker.verify("board.net", bom=["bom.csv"], declaration="declaration.yaml")
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from checker.api import verify, verify_project

__all__ = ["verify", "verify_project"]


def __getattr__(name: str) -> Any:
    """`checker.verify` loads the pipeline when it is first used, so that `import checker` and `--help` stay quick."""
    if name in __all__:
        from checker import api

        return getattr(api, name)
    raise AttributeError(f"module 'checker' has no attribute {name!r}")
