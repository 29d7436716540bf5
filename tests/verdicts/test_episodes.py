"""Episodes of moving windows, on paths whose answer is plain to see."""

from __future__ import annotations

import pandas as pd
import pytest
from counted_windows import COLUMNS

from sweep.verdicts.comparison import window_sentences
from sweep.verdicts.rolling import BASES, episodes, path_state


def paths(states: str, name: str = "rolling 40", halves: str | None = None) -> pd.DataFrame:
    """One window entry: h holds, n does not hold, - is not admissible; quarters from 2000."""
    dates = pd.period_range("2000Q1", periods=len(states), freq="Q").to_timestamp()
    rows = []
    for position, (state, half) in enumerate(zip(states, halves or states, strict=True)):
        p = {"h": 0.01 + position / 1000, "n": 0.5, "-": None}[state]
        admissible = 0 if half == "-" else 10
        rows.append(
            (
                name, "rolling", 40, 1, position, dates[position] - pd.DateOffset(years=10),
                dates[position], 12, admissible, {"h": 5, "n": 4, "-": 0}[half], p, p,
                {"h": True, "n": False, "-": None}[state],
            )
        )  # fmt: skip
    return pd.DataFrame(rows, columns=list(COLUMNS))


def held(frame: pd.DataFrame, basis: str) -> list[tuple[str, str, int, bool]]:
    own = frame[(frame["basis"] == basis) & (frame["state"] == "holds")]
    return [
        (str(row["first_end"])[:7], str(row["last_end"])[:7], row["positions"], row["open_end"])
        for row in own.to_dict("records")
    ]


def test_episodes_are_the_longest_runs_of_neighbours() -> None:
    runs = episodes(paths("nhhh-hhn"))
    assert held(runs, BASES[0]) == [
        ("2000-04", "2000-10", 3, False), ("2001-04", "2001-07", 2, False),
    ]  # fmt: skip
    first = runs[(runs["basis"] == BASES[0]) & (runs["state"] == "holds")].iloc[0]
    assert first["lowest_p"] == pytest.approx(0.011)
    assert first["highest_p"] == pytest.approx(0.013)
    assert str(first["first_start"])[:7] == "1990-04"


def test_an_episode_at_the_end_is_open() -> None:
    assert held(episodes(paths("nnh")), BASES[0]) == [("2000-07", "2000-07", 1, True)]
    assert held(episodes(paths("hhh")), BASES[0]) == [("2000-01", "2000-07", 3, True)]


def test_both_bases_are_followed_apart() -> None:
    runs = episodes(paths("hhnn", halves="nnhh"))
    assert held(runs, BASES[0]) == [("2000-01", "2000-04", 2, False)]
    assert held(runs, BASES[1]) == [("2000-07", "2000-10", 2, True)]


def test_every_position_is_in_one_run() -> None:
    runs = episodes(pd.concat([paths("hn-hhn-"), paths("nnn", name="rolling 60")]))
    for basis in BASES:
        own = runs[runs["basis"] == basis]
        sizes = own.groupby("window_name")["positions"].sum().to_dict()
        assert sizes == {"rolling 40": 7, "rolling 60": 3}


def test_half_is_enough_and_nothing_admissible_is_no_answer() -> None:
    row = {"admissible": 10, "survived": 5, "baseline_survives": None}
    assert path_state(row, BASES[1]) == "holds"
    assert path_state(row | {"survived": 4}, BASES[1]) == "does not hold"
    assert path_state(row | {"admissible": 0}, BASES[1]) == "not admissible"
    assert path_state(row, BASES[0]) == "not admissible"


def test_sentences_give_counts_and_the_longest_episode() -> None:
    frame = paths("nhhhnh")
    pairs = pd.DataFrame(
        [("rolling 40", "rolling 60", 8, 3, 1, 2, 2, None, None)],
        columns=["first_window", "second_window", "shared", "both_survive", "only_first",
                 "only_second", "neither", "first_end", "last_end"],
    )  # fmt: skip
    sentences = window_sentences(frame, pairs, episodes(frame))
    assert sentences[0] == (
        "rolling 40: with the baseline's other choices the finding holds at 4 of 6 (67%) end "
        "dates, in 2 episodes; the longest has 3 positions, with windows ending 2000-04-01 to "
        "2000-10-01 (p 0.011 to 0.013)."
    )
    assert "they agree in 5 of 8 (63%), 1 survive in the first only and 2 in" in sentences[1]
    assert window_sentences(frame.iloc[:0], pairs, episodes(frame.iloc[:0])) == [
        "The sweep has no moving windows."
    ]
