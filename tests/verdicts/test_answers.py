"""Sentences on requests, read from counted frames."""

from __future__ import annotations

import counted_frames
import pandas as pd

from sweep.verdicts.answers import answer_sentences


def said(**changes: object) -> list[str]:
    frames = counted_frames.frames_of(counted_frames.Sweep(**changes))
    return answer_sentences(frames["requests"], frames["answers"])


def test_every_request_is_answered_once() -> None:
    sentences = said()
    assert len(sentences) == 3
    assert sentences[0].startswith(
        "Referee 2, comment 4 asks: “Does it hold with other lags?” At the baseline the finding "
    )
    assert sentences[1].startswith("a=b & <c>. At the baseline the finding ")
    assert sentences[2] == (
        "Referee 3, all as reported asks: “Is it reproduced?” It names the baseline's own choices "
        "only. It adds no row: all that it asks was planned or had been added."
    )


def test_numbers_are_those_of_the_rows() -> None:
    frames = counted_frames.frames_of(counted_frames.Sweep())
    own = frames["answers"][frames["answers"]["request"] == 1]
    words = answer_sentences(frames["requests"], frames["answers"])[0]
    for row in own.to_dict("records"):
        state = "holds" if row["survived"] else "does not hold"
        assert f"with {row['changed']} it {state} (p " in words
    count = frames["requests"].iloc[0]
    assert f"It adds {count['added']:,} rows to the sweep, {count['admissible']:,} adm" in words
    assert f"survives in {count['survived']:,} of {count['admissible']:,}" in words


def test_requests_about_other_findings_are_left_out() -> None:
    frames = counted_frames.frames_of(counted_frames.Sweep())
    requests = frames["requests"].assign(concerned=[False, True, False])
    assert len(answer_sentences(requests, frames["answers"])) == 1
    nobody = pd.DataFrame(columns=requests.columns)
    assert answer_sentences(nobody, frames["answers"].iloc[:0]) == []


def test_a_baseline_without_an_answer_is_said() -> None:
    frames = counted_frames.frames_of(counted_frames.Sweep())
    answers = frames["answers"].assign(baseline_survives=None)
    assert "The baseline is not admissible; with" in answer_sentences(
        frames["requests"], answers
    )[0]
