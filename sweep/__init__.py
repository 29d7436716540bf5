"""Crosswind: every defensible specification of a directional finding, run, kept and counted."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

__version__ = "0.1.0"
__all__ = ["__version__", "check", "load_plan", "new", "open_results", "run", "schema"]

if TYPE_CHECKING:
    from sweep.api import check, load_plan, new, open_results, run, schema


def __getattr__(name: str) -> Any:
    """Import the verbs when they are first used, so that commands start quickly."""
    if name in __all__:
        from sweep import api

        return getattr(api, name)
    raise AttributeError(f"module 'sweep' has no attribute {name!r}")
