"""What a report is made from: frames, words and records, never a connection."""

from __future__ import annotations

import json
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

from sweep.charts import CHARTS, chart
from sweep.charts.context import Context, baseline_record, context_of, frequency_of
from sweep.verdicts import directions, effects, flips, reproduction, survival
from sweep.verdicts.answers import answer_sentences
from sweep.verdicts.words import counted, joined, missing, p_text, percent, reason_text

from . import cube
from .notes import CAUTIONS, METHOD_NOTES, Note
from .tables import PAGE_TABLES

if TYPE_CHECKING:
    import pandas as pd

__all__ = [
    "FRAMES",
    "FindingContent",
    "ReportContent",
    "answered",
    "baseline_sentence",
    "content_of",
    "first_lines",
    "sizes",
    "summary",
]

# What the sentences of a report are made from.
_SENTENCES = (
    "survival", "baseline", "attrition", "single_changes", "shortest_flips", "directions",
    "effects", "effects_overall", "requests", "answers", "strata",
)  # fmt: skip

# Every frame that a report reads, named as the functions of ``store.read``.
FRAMES = tuple(
    dict.fromkeys(
        [
            *_SENTENCES,
            *cube.NEEDS,
            *(frame for name in CHARTS for frame in chart(name).NEEDS),
            *(frame for module in PAGE_TABLES.values() for frame in module.NEEDS),
        ]
    )
)


@dataclass(frozen=True, slots=True)
class FindingContent:
    """One finding of a report.

    Attributes
    ----------
    record : mapping
        The finding as the store keeps it.
    context : Context
        Its claim, level and counts.
    frames : dict of str to DataFrame
        One frame for each name in ``FRAMES``.
    redundancies : tuple of str
        Sentences on choices that give the same numbers by construction.
    """

    record: Mapping[str, Any]
    context: Context
    frames: dict[str, pd.DataFrame]
    redundancies: tuple[str, ...] = ()

    @property
    def reproduction(self) -> reproduction.Reproduction:
        """The baseline beside the printed numbers."""
        return reproduction.compare(baseline_record(self.frames["baseline"]), self.record)


@dataclass(frozen=True, slots=True)
class ReportContent:
    """Everything that the page shows.

    Attributes
    ----------
    title : str
        The plan's title.
    significance : float
        The plan's level.
    findings : tuple of FindingContent
        In plan order.
    redundancies, ruled_out : tuple of str
        Sentences that hold for all findings: redundant choices; combinations that the plan
        rules out, with reasons and counts.
    data, run, versions, hashes : mapping of str to str
        Facts shown as two columns.
    plan_toml : str
        The plan's text.
    unfinished : str
        How much is stored where that is not everything; else empty.
    notes, cautions
        How the numbers are made, and what they do not say.
    """

    title: str
    significance: float
    findings: tuple[FindingContent, ...]
    redundancies: tuple[str, ...] = ()
    ruled_out: tuple[str, ...] = ()
    data: Mapping[str, str] = field(default_factory=dict)
    run: Mapping[str, str] = field(default_factory=dict)
    versions: Mapping[str, str] = field(default_factory=dict)
    hashes: Mapping[str, str] = field(default_factory=dict)
    plan_toml: str = ""
    unfinished: str = ""
    notes: tuple[Note, ...] = METHOD_NOTES
    cautions: tuple[str, ...] = CAUTIONS


def first_lines(report: ReportContent) -> list[tuple[str, str]]:
    """Return the report's first lines, on whether each baseline gives the printed numbers.

    Returns
    -------
    list of (names, sentence)
        One line for each finding that has printed numbers, one for all others together; the
        names are empty in a report on a single finding.
    """
    found = [(one.context.finding, one.reproduction) for one in report.findings]
    lines = [(name, said.sentence) for name, said in found if said.reproduced is not None]
    others = [(name, said.sentence) for name, said in found if said.reproduced is None]
    if others:
        lines.append((joined(name for name, _ in others), others[0][1]))
    return lines if len(report.findings) > 1 else [("", sentence) for _, sentence in lines]


def baseline_sentence(finding: FindingContent) -> str:
    """Name the baseline's choices and say what it gives."""
    row = baseline_record(finding.frames["baseline"])
    if missing(row["lags_choice"]):
        return "The baseline has not been run yet."
    names = {
        "lags": "lags_choice", "deterministics": "deterministics", "window": "window_name",
        "transformation": "transformation", "test": "test", "conditioning": "conditioning",
        "measures": "measures",
    }  # fmt: skip
    choices = ", ".join(f"{axis} {row[name]}" for axis, name in names.items())
    if row["status"] != "ok":
        return f"The baseline ({choices}) is {reason_text(row['status'], row['reason'])}."
    p_values = f"p {p_text(row['p_value'])} from cause to effect"
    if not missing(row["reverse_p_value"]):
        p_values += f" and {p_text(row['reverse_p_value'])} back"
    if missing(row["survives"]) or not row["admissible"]:
        return f"The baseline ({choices}) is not admissible: {p_values}."
    holds = "holds" if row["survives"] else "does not hold"
    return f"In the baseline ({choices}) the finding {holds}: {p_values}."


def summary(finding: FindingContent) -> list[str]:
    """Return the sentences that sum up a finding, in the order in which they are read."""
    context, frames = finding.context, finding.frames
    counts = context.counts
    baseline = baseline_record(frames["baseline"])
    # Nothing can turn away from a baseline that is not admissible.
    holds = baseline["survives"] if baseline["admissible"] else None
    told = "The finding survives in" if counts.admissible else "Nothing can be said:"
    sentences = [f"{told} {survival.headline(counts, context.design)}."]
    if context.design.endswith(("change", "changes")):
        pooled = (
            "The sweep changes few choices at a time, so there is no pooled share; the changes "
            "beside the baseline are what it shows."
        )
        sentences = [pooled] if counts.admissible else [*sentences, pooled]
    else:
        if context.design.startswith("sample") and counts.admissible:
            sentences.append(_drawn(frames["strata"]))
        sentences.append(survival.levels_sentence(counts, context.significance))
    sentences.append(survival.losses_sentence(counts))
    if counts.other_sign:
        sentences.append(
            f"In {counted(counts.other_sign, 'row')} the test rejects but the sum of the "
            "coefficients has the other sign; "
            f"{'it does' if counts.other_sign == 1 else 'they do'} not count as survived."
        )
    single = flips.single_sentence(frames["single_changes"], holds, design=context.design)
    if frames["baseline"].empty:
        single = "The baseline was not run yet, so no change can be set beside it."
    sentences += [
        single,
        flips.pair_sentence(frames["flip_counts"], holds, context.design),
        flips.path_sentence(frames["shortest_flips"], holds, context.design),
        directions.sentence(frames["directions"]),
    ]
    return [sentence for sentence in sentences if sentence]


def _drawn(strata: pd.DataFrame) -> str:
    """Say that the rows are a sample, and how near its share is to that of the whole plan."""
    interval = survival.sampling_interval(strata)
    if interval is None:
        return "These rows are a sample of the plan."
    low, high = (percent(end) for end in interval)
    return (
        "These rows are a sample of the plan; the 95% sampling interval of the weighted share is "
        f"{low} to {high}."
    )


def answered(finding: FindingContent) -> list[str]:
    """Return the answers to the requests that concern a finding, one paragraph each."""
    return answer_sentences(finding.frames["requests"], finding.frames["answers"])


def sizes(finding: FindingContent) -> list[str]:
    """Return the sentences on sign and size of the effect."""
    return effects.sentences(finding.frames["effects_overall"], finding.frames["effects"])


def _digest(finding: Mapping[str, Any], name: str) -> str:
    return f"{int(finding[f'{name}_high']):016x}{int(finding[f'{name}_low']):016x}"


def _facts(text: Any) -> dict[str, str]:
    """Return a stored JSON object as words by name."""
    if missing(text) or not text:
        return {}
    loaded = json.loads(text) if isinstance(text, str) else dict(text)
    return {
        str(name): value if isinstance(value, str) else json.dumps(value, ensure_ascii=False)
        for name, value in loaded.items()
        if not missing(value)
    }


def _moment(value: Any) -> str | None:
    """Write a time to the second, in universal time as the store keeps it."""
    return None if missing(value) else f"{str(value)[:19]} UTC"


def _seconds(value: Any) -> str | None:
    return None if missing(value) else f"{float(value):.1f}"


def content_of(
    info: Mapping[str, Any],
    findings: Sequence[Mapping[str, Any]],
    frames: Mapping[int, dict[str, pd.DataFrame]],
    *,
    redundancies: Mapping[int, Sequence[str]] | None = None,
    ruled_out: Sequence[str] = (),
) -> ReportContent:
    """Gather a report's content from what the store's readers return.

    Parameters
    ----------
    info : mapping
        ``store.read.sweep_info``: the sweep's record and its run.
    findings : sequence of mapping
        The records of the findings, in plan order.
    frames : mapping of int to dict of DataFrame
        For each finding's number, one frame for each name in ``FRAMES``.
    redundancies : mapping of int to sequence of str, optional
        Sentences by finding on choices that give the same numbers by construction.
    ruled_out : sequence of str
        Sentences on combinations that the plan rules out.

    Raises
    ------
    KeyError
        If a frame is missing.
    """
    data = _facts(info["data_note"])
    note = "; ".join(f"{name}: {value}" for name, value in data.items())
    found = []
    for record in findings:
        number = int(record["finding"])
        own = {name: frames[number][name] for name in FRAMES}
        context = context_of(
            record,
            own["survival"],
            significance=float(info["significance"]),
            title=str(info["title"]),
            design=str(info["design"]),
            data_note=note,
            frequency=frequency_of(info),
        )
        said = tuple((redundancies or {}).get(number, ()))
        found.append(FindingContent(record, context, own, said))
    run = {
        "started": _moment(info.get("started")),
        "finished": _moment(info.get("finished")),
        "seconds": _seconds(info.get("wall_seconds")),
        "rows stored": info.get("rows"),
        "rows planned": info.get("planned"),
        "design": info.get("design"),
        "seed": info.get("seed"),
        "numerics": info.get("numerics"),
    }
    hashes = {"plan": str(info["plan_digest"])}
    for record in findings:
        hashes[f"data of “{record['name']}”"] = _digest(record, "data")
        hashes[f"baseline of “{record['name']}”"] = _digest(record, "baseline")
    return ReportContent(
        title=str(info["title"]),
        significance=float(info["significance"]),
        findings=tuple(found),
        redundancies=(),
        ruled_out=tuple(ruled_out),
        data=data,
        run={name: str(value) for name, value in run.items() if not missing(value)},
        versions=_facts(info["versions"]),
        hashes=hashes,
        plan_toml=str(info["plan_toml"]),
    )
