"""Two sweeps side by side, in sentences."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from .words import counted, joined, missing, number, p_text, percent, share_text

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["pair_sentences", "window_sentences"]

# Choices named whose shares moved most.
_NAMED = 3


def pair_sentences(frames: Mapping[str, pd.DataFrame], names: tuple[str, str]) -> list[str]:
    """Sum up what changed between two sweeps for one finding.

    Parameters
    ----------
    frames : mapping of str to DataFrame
        What ``store.read_compare.compare_frames`` returns.
    names : tuple of str
        How the two sweeps are called in the sentences.

    Returns
    -------
    list of str
    """
    first, second = names
    counts = frames["counts"].iloc[0]
    shared = int(counts["shared"])
    sentences = [_shared_words(counts, names)]
    if not shared:
        return sentences
    both = int(counts["both_admissible"])
    if not both:
        return [*sentences, "No shared row is admissible in both, so there is nothing to set "
                "side by side."]  # fmt: skip
    sentences.append(
        f"Of {both:,} rows admissible in both, the finding survives in "
        f"{_in_both(counts)} in both, {int(counts['only_mine_survive']):,} in {first} only, "
        f"{int(counts['only_theirs_survive']):,} in {second} only and "
        f"{int(counts['neither_survives']):,} in neither."
    )
    sentences.append(_moved_words(counts))
    lost = int(counts["only_mine_admissible"]), int(counts["only_theirs_admissible"])
    if any(lost):
        sentences.append(
            f"Of the shared rows, {lost[0]:,} can be counted in {first} only and {lost[1]:,} in "
            f"{second} only (the others are not admissible there)."
        )
    sentences += _share_words(frames["survival"], names)
    return sentences


def _in_both(counts: Any) -> str:
    return share_text(int(counts["both_survive"]), int(counts["both_admissible"]))


def _shared_words(counts: Any, names: tuple[str, str]) -> str:
    mine, theirs, shared = (int(counts[key]) for key in ("my_rows", "their_rows", "shared"))
    words = f"{names[0]} has {mine:,} rows and {names[1]} {theirs:,}; "
    if not shared:
        return f"{words}they share no specification."
    if mine == theirs == shared:
        return f"{words}they are the same specifications."
    return (
        f"{words}{shared:,} specifications are in both, {mine - shared:,} in {names[0]} only and "
        f"{theirs - shared:,} in {names[1]} only."
    )


def _moved_words(counts: Any) -> str:
    both, same = int(counts["both_admissible"]), int(counts["same_numbers"])
    if same == both:
        return "All their p-values are the same."
    changed = int(counts["verdict_changed"])
    return (
        f"The direction verdict differs in {share_text(changed, both)}; p-values are the same to "
        f"nine decimals in {same:,} rows and differ by "
        f"{number(counts['largest_p_difference'])} at most."
    )


def _share_words(survival: pd.DataFrame, names: tuple[str, str]) -> list[str]:
    """Compare the headline shares, and name the choices whose shares moved most."""
    whole = survival[survival["axis"] == "all"]
    sentences = []
    if len(whole):
        row = whole.iloc[0]
        if not missing(row["my_share"]) and not missing(row["their_share"]):
            sentences.append(
                f"The weighted share over all planned rows is {percent(row['my_share'])} in "
                f"{names[0]} and {percent(row['their_share'])} in {names[1]}."
            )
    moved = survival[(survival["axis"] != "all") & survival["difference"].notna()]
    unlike = [
        percent(a) != percent(b)
        for a, b in zip(moved["my_share"], moved["their_share"], strict=True)
    ]
    moved = moved[unlike]
    order = moved["difference"].abs().sort_values(ascending=False, kind="stable").index
    parts = [
        f"{row['axis']} {row['choice']} ({percent(row['my_share'])} to "
        f"{percent(row['their_share'])})"
        for row in moved.loc[order].head(_NAMED).to_dict("records")
    ]
    if parts:
        sentences.append(f"The shares that moved most: {joined(parts)}.")
    return sentences


def window_sentences(
    paths: pd.DataFrame, pairs: pd.DataFrame, runs: pd.DataFrame
) -> list[str]:
    """Sum up moving windows of several lengths or steps.

    Parameters
    ----------
    paths, pairs : DataFrame
        The store's frames ``window_paths`` and ``window_pairs``.
    runs : DataFrame
        What :func:`sweep.verdicts.rolling.episodes` returns.
    """
    if paths.empty:
        return ["The sweep has no moving windows."]
    sentences = []
    for name, own in runs.groupby("window_name", sort=False):
        held = own[(own["state"] == "holds") & (own["basis"] == own["basis"].iloc[0])]
        whole = int(own.loc[own["basis"] == own["basis"].iloc[0], "positions"].sum())
        count = int(held["positions"].sum())
        words = f"{name}: with the baseline's other choices the finding holds at "
        words += f"{share_text(count, whole)} end dates"
        if len(held):
            longest = held.loc[held["positions"].idxmax()]
            words += (
                f", in {counted(len(held), 'episode')}; the longest has "
                f"{counted(int(longest['positions']), 'position')}, with windows ending "
                f"{_day(longest['first_end'])} to {_day(longest['last_end'])} (p "
                f"{p_text(longest['lowest_p'])} to {p_text(longest['highest_p'])})"
            )
        sentences.append(f"{words}.")
    for row in pairs.to_dict("records"):
        shared = int(row["shared"])
        agree = int(row["both_survive"]) + int(row["neither"])
        sentences.append(
            f"{row['first_window']} and {row['second_window']} share {shared:,} admissible rows "
            "with the same last date and other choices; they agree in "
            f"{share_text(agree, shared)}, {int(row['only_first']):,} survive in the first only "
            f"and {int(row['only_second']):,} in the second only."
        )
    return sentences


def _day(value: Any) -> str:
    return str(value)[:10]
