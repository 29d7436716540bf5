"""Reading a store: every function returns a small frame that charts, tables and verdicts take.

The functions live in modules by subject; this one is the place to import them from.
"""

from __future__ import annotations

from store.read_changes import (
    flip_counts,
    flip_distances,
    flips,
    shortest_flips,
    single_changes,
)
from store.read_compare import window_pairs, window_paths
from store.read_cube import cube, cube_windows
from store.read_curve import curve
from store.read_list import LIST_COLUMNS, alternatives, list_rows, list_size
from store.read_outcomes import baseline, details, outcome_columns, outcomes, specification
from store.read_pairs import pair_cells
from store.read_requests import answers, requests
from store.read_sample import sample, sample_details, sample_strata
from store.read_shares import (
    attrition,
    directions,
    effects,
    effects_overall,
    strata,
    survival,
    windows,
)
from store.read_sweeps import choices, findings, latest_sweep, require_rows, sweep_info, sweeps

__all__ = [
    "LIST_COLUMNS",
    "alternatives",
    "answers",
    "attrition",
    "baseline",
    "choices",
    "cube",
    "cube_windows",
    "curve",
    "details",
    "directions",
    "effects",
    "effects_overall",
    "findings",
    "flip_counts",
    "flip_distances",
    "flips",
    "latest_sweep",
    "list_rows",
    "list_size",
    "outcome_columns",
    "outcomes",
    "pair_cells",
    "requests",
    "require_rows",
    "sample",
    "sample_details",
    "sample_strata",
    "shortest_flips",
    "single_changes",
    "specification",
    "strata",
    "survival",
    "sweep_info",
    "sweeps",
    "window_pairs",
    "window_paths",
    "windows",
]
