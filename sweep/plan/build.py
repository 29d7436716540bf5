"""From what was written to what is meant: one choice record for each entry of an axis."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import date
from itertools import combinations, product
from typing import Any

from sweep.panel.periods import Frequency, Side, canonical_period
from sweep.plan.choices import (
    ConditioningChoice,
    DeterministicChoice,
    LagChoice,
    MeasureChoice,
    ProcedureChoice,
    TransformationChoice,
    WindowChoice,
)
from sweep.plan.tables import (
    DeterministicTable,
    LagTable,
    MeasureTable,
    ProcedureTable,
    SampleTable,
    TransformationTable,
    WindowTable,
)

__all__ = [
    "conditioning_choices",
    "deterministic_choice",
    "lag_choice",
    "measure_choices",
    "procedure_choice",
    "transformation_choice",
    "window_choices",
]

TREND_LEVEL = {"none": -1, "constant": 0, "linear trend": 1, "quadratic trend": 2}
LARGEST_SUBSETS = 4


def lag_choice(entry: int | str | LagTable, frequency: Frequency) -> LagChoice:
    """Build a lag choice; a bare criterion takes the frequency's largest order."""
    if isinstance(entry, int):
        entry = LagTable(order=entry)
    elif isinstance(entry, str):
        entry = LagTable.model_validate({"criterion": entry})
    common = entry.sample.common if isinstance(entry.sample, SampleTable) else 0
    if entry.criterion is not None:
        return _criterion_choice(entry, common, frequency)
    own = entry.order or entry.own or 0
    cause = entry.order or entry.cause or 0
    given = entry.given or own
    if common and common < max(own, cause, given):
        raise ValueError(
            f"the common order {common} is smaller than the lags; raise it to "
            f"{max(own, cause, given)} or more"
        )
    meaning: dict[str, Any] = {"order": own}
    label = f"{own}"
    if not own == cause == given:
        meaning = {"own": own, "cause": cause} | ({"given": given} if given != own else {})
        label = f"own {own}, cause {cause}" + (f", given {given}" if given != own else "")
    if common:
        meaning["common"] = common
        label += f", sample of {common}"
    return LagChoice(
        entry.name or label, meaning, entry.because, own=own, cause=cause, given=given,
        common=common,
    )  # fmt: skip


def _criterion_choice(entry: LagTable, common: int, frequency: Frequency) -> LagChoice:
    criterion = entry.criterion or ""
    maximum = entry.maximum or frequency.criterion_maximum
    if common and common < maximum:
        raise ValueError(
            f"the common order {common} is smaller than the criterion's maximum {maximum}"
        )
    meaning: dict[str, Any] = {"criterion": criterion}
    label: str = criterion
    if maximum != frequency.criterion_maximum:
        meaning["maximum"] = maximum
        label += f" up to {maximum}"
    if entry.scope != "system":
        meaning["scope"] = entry.scope
        label += ", effect's equation"
    if criterion == "sequential LR" and entry.level != 0.05:
        meaning["level"] = entry.level
        label += f" at {entry.level:g}"
    if common:
        meaning["common"] = common
        label += f", sample of {common}"
    return LagChoice(
        entry.name or label, meaning, entry.because, criterion=criterion, maximum=maximum,
        scope=entry.scope, common=common, level=entry.level,
    )  # fmt: skip


def deterministic_choice(
    entry: str | DeterministicTable, frequency: Frequency
) -> DeterministicChoice:
    """Build a choice of deterministic terms."""
    if isinstance(entry, str):
        entry = DeterministicTable.model_validate({"trend": entry})
    if entry.seasonal and frequency.seasons < 2:
        raise ValueError("seasonal dummies need data observed more than once a year")
    steps = tuple(_when(value, frequency, "first") for value in entry.steps)
    pulses = tuple(_single(value, frequency) for value in entry.pulses)
    for name, dates in (("steps", steps), ("pulses", pulses)):
        if len(set(dates)) != len(dates):
            raise ValueError(f"a date stands twice in {name}")
    parts: list[str] = [entry.trend]
    meaning: dict[str, Any] = {"trend": entry.trend}
    if entry.seasonal:
        meaning["seasonal"] = True
        parts.append("seasonal")
    for name, dates in (("step", steps), ("pulse", pulses)):
        if dates:
            meaning[f"{name}s"] = sorted(dates)
            parts.append(f"{name} {', '.join(dates)}")
    if entry.fourier:
        meaning["fourier"] = entry.fourier
        parts.append(f"Fourier {entry.fourier}")
    return DeterministicChoice(
        entry.name or " + ".join(parts), meaning, entry.because, trend=TREND_LEVEL[entry.trend],
        seasonal=entry.seasonal, steps=tuple(sorted(steps)), pulses=tuple(sorted(pulses)),
        fourier=entry.fourier,
    )  # fmt: skip


def window_choices(entry: str | WindowTable, frequency: Frequency) -> list[WindowChoice]:
    """Build the window choice of an entry; a split makes two."""
    if isinstance(entry, str):
        return [WindowChoice(entry, {})]
    if entry.split is not None:
        until = _before(entry.split, frequency)
        name = entry.name
        before = WindowTable.model_validate(
            {"until": until, "name": f"{name}: before" if name else "", "because": entry.because}
        )
        after = WindowTable.model_validate(
            {
                "from": _when(entry.split, frequency, "first"),
                "name": f"{name}: after" if name else "",
                "because": entry.because,
            }
        )
        return [_window_choice(before, frequency), _window_choice(after, frequency)]
    return [_window_choice(entry, frequency)]


def _before(value: str | int | date, frequency: Frequency) -> str:
    from sweep.panel.periods import advance, parse_period, period_label

    first, _ = parse_period(value, frequency)
    return period_label(advance(first, frequency, -1), frequency)


def _window_choice(entry: WindowTable, frequency: Frequency) -> WindowChoice:
    first = _when(entry.from_, frequency, "first") if entry.from_ is not None else ""
    last = _when(entry.until, frequency, "last") if entry.until is not None else ""
    episodes = tuple(sorted(_episodes(entry.without, frequency)))
    moving, length = _moving(entry)
    meaning: dict[str, Any] = {}
    parts = []
    if moving:
        meaning[moving] = length
        parts.append(f"{moving} {length}")
        if entry.step != 1:
            meaning["step"] = entry.step
            parts.append(f"step {entry.step}")
    if first:
        meaning["from"] = first
    if last:
        meaning["until"] = last
    if first or last:
        parts.append(" ".join(filter(None, [first and f"from {first}", last and f"until {last}"])))
    if episodes:
        meaning["without"] = [list(pair) for pair in episodes]
        parts.append("without " + " and ".join(f"{a} to {b}" for a, b in episodes))
    for end, share in (("first", entry.drop_first), ("last", entry.drop_last)):
        if share:
            meaning[f"drop_{end}"] = share
            parts.append(f"without the {end} {share:.0%}")
    if not meaning:
        raise ValueError('leaves nothing out; write "full sample"')
    return WindowChoice(
        entry.name or ", ".join(parts), meaning, entry.because, first=first, last=last,
        without=episodes, drop_first=entry.drop_first, drop_last=entry.drop_last, moving=moving,
        length=length, step=entry.step,
    )  # fmt: skip


def _moving(entry: WindowTable) -> tuple[str, int]:
    for name in ("rolling", "expanding", "shrinking"):
        length = getattr(entry, name)
        if length is not None:
            return name, int(length)
    return "", 0


def _episodes(value: Any, frequency: Frequency) -> list[tuple[str, str]]:
    if value is None:
        return []
    pairs = value if value and isinstance(value[0], list) else [value]
    episodes = []
    for pair in pairs:
        if len(pair) != 2:
            raise ValueError("an episode is a pair [first, last], both left out")
        first, last = _when(pair[0], frequency, "first"), _when(pair[1], frequency, "last")
        if first > last:
            raise ValueError(f"the episode ends ({last}) before it starts ({first})")
        episodes.append((first, last))
    return episodes


def transformation_choice(
    entry: str | TransformationTable, frequency: Frequency
) -> TransformationChoice:
    """Build a choice of scales; exceptions equal to the default are left out."""
    if isinstance(entry, str):
        entry = TransformationTable.model_validate({"default": entry})
    series = tuple(sorted((k, v) for k, v in entry.series.items() if v != entry.default))
    used = {entry.default, *(name for _, name in series)}
    if "yearly growth" in used and frequency.year is None:
        raise ValueError(f"yearly growth has no fixed number of periods in {frequency.name} data")
    smoothing = entry.smoothing if entry.smoothing != frequency.smoothing else None
    if "Hodrick-Prescott cycle" in used and entry.smoothing is None and frequency.smoothing is None:
        raise ValueError(
            f"no usual Hodrick-Prescott smoothing exists for {frequency.name} data; give one, "
            'for example { default = "Hodrick-Prescott cycle", smoothing = 129600 }'
        )
    horizon = entry.horizon if entry.horizon != frequency.hamilton_horizon else None
    if smoothing and "Hodrick-Prescott cycle" not in used:
        raise ValueError('"smoothing" goes with "Hodrick-Prescott cycle"')
    if horizon and "Hamilton cycle" not in used:
        raise ValueError('"horizon" goes with "Hamilton cycle"')
    meaning: dict[str, Any] = {"default": entry.default}
    label: str = entry.default
    if series:
        meaning["series"] = dict(series)
        label += "; " + "; ".join(f"{name}: {kind}" for name, kind in series)
    if smoothing:
        meaning["smoothing"] = smoothing
        label += f", smoothing {smoothing:g}"
    if horizon:
        meaning["horizon"] = horizon
        label += f", horizon {horizon}"
    return TransformationChoice(
        entry.name or label, meaning, entry.because, default=entry.default, series=series,
        smoothing=smoothing or 0.0, horizon=horizon or 0,
    )  # fmt: skip


def procedure_choice(entry: str | ProcedureTable) -> ProcedureChoice:
    """Build a choice of statistic and covariance."""
    if isinstance(entry, str):
        entry = ProcedureTable.model_validate({"test": entry})
    meaning: dict[str, Any] = {"statistic": entry.statistic}
    label: str = entry.statistic
    augmented = entry.statistic == "lag augmented"
    if augmented:
        label += f" by {entry.extra_lags}"
        if entry.extra_lags != 1:
            meaning["extra_lags"] = entry.extra_lags
        if entry.form != "F":
            meaning["form"] = entry.form
            label += f", {entry.form}"
    if entry.covariance != "classical":
        meaning["covariance"] = entry.covariance
        label += f", {entry.covariance}"
    if entry.covariance == "HAC":
        bandwidth = entry.bandwidth
        meaning["bandwidth"] = bandwidth
        label += f" {bandwidth}" if isinstance(bandwidth, str) else f" {bandwidth:g}"
        if entry.kernel != "Bartlett":
            meaning["kernel"] = entry.kernel
            label += f", {entry.kernel}"
        if entry.small_sample:
            meaning["small_sample"] = True
            label += ", T/(T-k)"
    if entry.divisor != "T-k":
        meaning["divisor"] = entry.divisor
        label += f", divisor {entry.divisor}"
    return ProcedureChoice(
        entry.name or label, meaning, entry.because, statistic=entry.statistic,
        covariance=entry.covariance, divisor=entry.divisor,
        extra_lags=entry.extra_lags if augmented else 0, form=entry.form if augmented else "",
        kernel=entry.kernel if entry.covariance == "HAC" else "",
        bandwidth=entry.bandwidth or 0.0, small_sample=entry.small_sample,
    )  # fmt: skip


def conditioning_choices(entry: str, given: Sequence[str]) -> list[ConditioningChoice]:
    """Return the choices that an entry means for one finding's given series.

    Raises
    ------
    ValueError
        For every subset of more than four given series.
    """
    names = sorted(given)
    if entry == "every subset":
        if len(names) > LARGEST_SUBSETS:
            raise ValueError(
                f"every subset of {len(names)} given series is {2 ** len(names)} sets; it is "
                f'offered up to {LARGEST_SUBSETS}, use "leave one out"'
            )
        left_out = [set(c) for size in range(len(names) + 1) for c in combinations(names, size)]
    elif entry == "leave one out":
        left_out = [{name} for name in names]
    else:
        left_out = [set(names) if entry == "pairwise" else set()]
    return [_without(tuple(sorted(names_out)), names) for names_out in left_out]


def _without(left_out: tuple[str, ...], names: list[str]) -> ConditioningChoice:
    if not left_out:
        return ConditioningChoice("given", {"set": "given"})
    if len(left_out) == len(names):
        return ConditioningChoice("pairwise", {"set": "pairwise"}, without=left_out)
    return ConditioningChoice(
        f"without {' and '.join(left_out)}", {"without": list(left_out)}, without=left_out
    )


def measure_choices(
    measures: dict[str, list[str | MeasureTable]], roles: Sequence[str]
) -> list[MeasureChoice]:
    """Return every combination of measures for the roles of one finding, plan order."""
    held = {role: entries for role, entries in measures.items() if role in roles}
    choices = []
    for picks in product(*held.values()):
        columns, inverted = {}, []
        for role, pick in zip(held, picks, strict=True):
            columns[role] = pick if isinstance(pick, str) else pick.series
            if not isinstance(pick, str) and pick.inverted:
                inverted.append(role)
        meaning: dict[str, Any] = {r: c for r, c in sorted(columns.items()) if r != c}
        label = "; ".join(columns[r] if len(held) == 1 else f"{r}: {columns[r]}" for r in columns)
        choices.append(
            MeasureChoice(
                label or "as named", meaning, columns=tuple(sorted(columns.items())),
                inverted=tuple(sorted(inverted)),
            )
        )  # fmt: skip
    return choices


def _when(value: str | int | date, frequency: Frequency, side: Side) -> str:
    return canonical_period(value, frequency, side)


def _single(value: str | int | date, frequency: Frequency) -> str:
    first = canonical_period(value, frequency, "first")
    if first != canonical_period(value, frequency, "last"):
        raise ValueError(f"a pulse is one {frequency.unit}; {value} names more than one")
    return first
