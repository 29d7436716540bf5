"""The one writer: puts outcomes into the store under its own codes."""

from __future__ import annotations

import json
from collections.abc import Sequence
from importlib.metadata import PackageNotFoundError, version
from platform import platform, python_version
from typing import Any

import numpy as np
from numpy.typing import NDArray

from store.database import Database
from store.read_sweeps import stored_rows, sweeps
from store.records import (
    ChoiceRecord,
    FindingRecord,
    RequestChoiceRecord,
    RequestRecord,
    SweepChoiceRecord,
    SweepRecord,
)
from store.write import SweepWriter
from sweep.engine.prepare import Prepared
from sweep.engine.reasons import REASONS, RULED, Reason, Status
from sweep.engine.task import ROW_FIELDS, LagCoefficients, Outcome
from sweep.plan.canonical import canonical_json, token
from sweep.plan.choices import AXES, Choice, MeasureChoice, ProcedureChoice, WindowChoice
from sweep.plan.document import ReportedTable
from sweep.plan.draw import stratum_size
from sweep.plan.model import Finding
from sweep.plan.tables import Table
from sweep.procedures import numerics
from sweep.screens import SCREENS, mask_of

__all__ = ["StoreSink", "package_versions"]

Ints = NDArray[np.int64]


class StoreSink:
    """Writes one sweep.

    Parameters
    ----------
    database : Database
        Open for writing.
    prepared : Prepared
    """

    def __init__(self, database: Database, prepared: Prepared) -> None:
        self.prepared = prepared
        self._database = database
        self._writer = SweepWriter(database)
        self._codes = {axis: self._register(axis) for axis in AXES}
        for screen in SCREENS.values():
            self._writer.register_screen(screen.BIT, screen.NAME)
        self._reasons = self._register_reasons()
        self._earlier = sweeps(self._database)
        self.sweep = self._begin()

    def changed_since(self) -> tuple[int, str] | None:
        """Return the latest earlier sweep of the plan and what has changed since, in words.

        None where there is none, or where this sweep was begun by an earlier run already.
        """
        earlier = self._earlier
        same = earlier.loc[earlier["plan_digest"] == self.prepared.plan.digest, "sweep"]
        if self.sweep in set(earlier["sweep"]) or same.empty:
            return None
        number = int(same.max())
        old, new = (
            self._database.execute(
                "SELECT finding, data_high, data_low FROM finding WHERE sweep = ? ORDER BY finding",
                [sweep],
            )
            for sweep in (number, self.sweep)
        )
        numerics = self._database.scalar("SELECT numerics FROM sweep WHERE sweep = ?", [number])
        words = ["the data"] if old != new else []
        words += ["the program's numerics"] if numerics != stored_numerics() else []
        return number, " and ".join(words)

    def missing(self, details: NDArray[np.bool_]) -> tuple[Ints, int, int]:
        """Return the rows to compute, and how many were stored before or taken over.

        Rows that the plan's rules exclude are written here, as ``not applicable``.

        Parameters
        ----------
        details : ndarray of bool, shape (rows,)
            Rows whose single lag coefficients are kept.
        """
        rows = self.prepared.rows
        have = self._writer.stored(self.sweep, self._planned(np.arange(rows.count)))
        ruled = np.flatnonzero(~have & (rows.rule >= 0))
        self._write_ruled(ruled)
        open_ = np.flatnonzero(~have & (rows.rule < 0))
        wanted = self._planned(open_) | {"details": details[open_]}
        taken = self._writer.reuse(self.sweep, wanted) if open_.size else open_ > 0
        return open_[~taken], int(have.sum()), int(taken.sum())

    def kept(self) -> int:
        """Return how many rows of the sweep are stored."""
        return stored_rows(self._database, self.sweep)

    def write(self, outcomes: Sequence[Outcome]) -> None:
        """Append outcomes in one transaction, in the order of the plan's rows."""
        row = np.concatenate([outcome.row for outcome in outcomes])
        order = np.argsort(row, kind="stable")
        fields: dict[str, NDArray[Any]] = {
            name: np.concatenate([getattr(outcome, name) for outcome in outcomes])[order]
            for name in ROW_FIELDS
        }
        fields["reason"] = self._reasons[fields["reason"]]
        details = [outcome.details for outcome in outcomes if outcome.details is not None]
        self._writer.write(self.sweep, self._batch(row[order], fields), self._details(details))

    def failed(self, rows: Ints, text: str) -> None:
        """Append rows whose computation broke, and log why."""
        self._writer.log("failed", text, self.sweep)
        reason = self._writer.register_reason(
            Status.FAILED, "the computation broke; the store's log says how"
        )
        fields = _empty(rows.size, Status.FAILED)
        fields["reason"] = np.full(rows.size, reason)
        self._writer.write(self.sweep, self._batch(rows, fields))

    def finish(self, seconds: float, counts: dict[str, int]) -> None:
        """Note the end of the run and close the log."""
        self._writer.finish(self.sweep, seconds, counts)

    def _register(self, axis: str) -> NDArray[np.int16]:
        records = []
        for choice in self.prepared.plan.axes[axis]:
            high, low = token(axis, choice.meaning)
            records.append(ChoiceRecord(high, low, choice.label, canonical_json(choice.meaning)))
        return np.array(self._writer.register_choices(axis, records), dtype=np.int16)

    def _register_reasons(self) -> NDArray[np.int16]:
        codes = np.zeros(max(Reason) + 1, np.int16)
        for reason, (status, text) in REASONS.items():
            codes[reason] = self._writer.register_reason(status, text)
        return codes

    def _begin(self) -> int:
        plan = self.prepared.plan
        design = plan.document.sweep.design
        record = SweepRecord(
            plan.digest,
            plan.text,
            plan.title,
            plan.document.seed,
            plan.significance,
            stored_numerics(),
            design if isinstance(design, str) else f"sample of {design.sample}",
            json.dumps(_data_note(self.prepared), ensure_ascii=False),
            json.dumps(package_versions()),
        )
        findings = [self._finding(finding) for finding in plan.findings]
        choices = [c for finding in plan.findings for c in self._choices(finding)]
        requests = [RequestRecord(r.number, r.name, r.asked_by, r.asks) for r in plan.requests]
        return self._writer.begin(
            record, findings, choices, self._positions(), requests, self._request_choices()
        )

    def _finding(self, finding: Finding) -> FindingRecord:
        plan = self.prepared.plan
        data = self.prepared.data_keys[finding.number]
        baseline = plan.baseline_id(finding)
        table = plan.document.baseline.reported
        if table is None or (table.finding or plan.findings[0].name) != finding.name:
            table = ReportedTable()
        return FindingRecord(
            finding.number,
            finding.name,
            finding.cause,
            finding.effect,
            ", ".join(finding.given),
            ", ".join(f"{item.series} ({item.lags} lags)" for item in finding.exogenous),
            finding.claim,
            finding.sign,
            finding.reverse_sign,
            *data,
            mask_of(plan.document.screens.require),
            *baseline,
            table.statistic,
            table.p_value,
            table.observations,
            table.tolerance,
            int((self._asked(finding) == 0).sum()),
            int((self._asked(finding) > 0).sum()),
            self._baseline_weight(finding),
        )

    def _asked(self, finding: Finding) -> NDArray[np.int16]:
        """Return, for each row of a finding, the request that asks for it, 0 for the plan."""
        rows = self.prepared.rows
        return np.compress(rows.finding == finding.number, rows.request)

    def _choices(self, finding: Finding) -> list[SweepChoiceRecord]:
        plan, rows = self.prepared.plan, self.prepared.rows
        mine = np.flatnonzero((rows.finding == finding.number) & (rows.request == 0))
        records = []
        for axis in AXES:
            held = plan.finding_axes[finding.number][axis]
            planned = np.bincount(rows.codes[axis][mine], minlength=len(plan.axes[axis]))
            for place, code in enumerate(held.every):
                choice = plan.axes[axis][code]
                moving = choice.moving if isinstance(choice, WindowChoice) else ""
                positions = 1
                if moving:
                    positions = self.prepared.windows[finding.number][code].count
                data = (0, 0)
                if isinstance(choice, MeasureChoice):
                    data = self.prepared.data_key(finding, choice)
                records.append(
                    SweepChoiceRecord(
                        finding.number,
                        axis,
                        int(self._codes[axis][code]),
                        choice.label,
                        choice.because,
                        code == held.baseline,
                        place,
                        self._weight(finding, axis, code, choice),
                        _orientation(finding, choice),
                        moving,
                        positions,
                        _scale_group(axis, choice),
                        choice.length if isinstance(choice, WindowChoice) else 0,
                        plan.first_request(finding, axis, code),
                        *data,
                        int(planned[code]),
                    )
                )
        return records

    def _request_choices(self) -> list[RequestChoiceRecord]:
        return [
            RequestChoiceRecord(
                finding.number, request.number, axis, int(self._codes[axis][code]), place
            )
            for request in self.prepared.plan.requests
            for finding in self.prepared.plan.findings
            for axis, codes in request.codes[finding.number].items()
            for place, code in enumerate(codes)
        ]

    def _weight(self, finding: Finding, axis: str, code: int, choice: Choice) -> float:
        """Return a choice's part of the headline weight, fixed by the plan.

        Designs that change few choices at a time have no pooled share: their weights are 0.
        What requests bring leaves the weights of planned choices alone.
        """
        if self.prepared.plan.document.sweep.design in ("one change", "two changes"):
            return 0.0
        plan = self.prepared.plan
        if isinstance(choice, ProcedureChoice):
            tests = plan.finding_axes[finding.number]["test"]
            held = tests.codes if code in tests.codes else tests.every
            group = [_test_group(plan.axes["test"][c]) for c in held]
            return 1.0 / group.count(_test_group(choice))
        if isinstance(choice, WindowChoice):
            if isinstance(plan.document.sweep.design, Table):
                return self._drawn_weight(finding, code)
            return 1.0 / self.prepared.windows[finding.number][code].count
        return 1.0

    def _drawn_weight(self, finding: Finding, code: int) -> float:
        """Return the part of its window entry that a drawn row stands for.

        The baseline, which is run whatever is drawn, stands for itself: for one row of the
        cross in its entry.
        """
        axis = self.prepared.plan.finding_axes[finding.number]["window"]
        rows, added = self.prepared.rows, code not in axis.codes
        mine = (rows.finding == finding.number) & ((rows.request > 0) == added)
        drawn = int((rows.codes["window"][mine] == code).sum())
        if code != axis.baseline or drawn < 2:
            return 1.0 / max(drawn, 1)
        whole = self._stratum(finding, code)
        return (whole - 1) / whole / (drawn - 1)

    def _baseline_weight(self, finding: Finding) -> float:
        """Return what the baseline's row weighs beside a drawn row of its window entry."""
        code = self.prepared.plan.finding_axes[finding.number]["window"].baseline
        if not isinstance(self.prepared.plan.document.sweep.design, Table):
            return 1.0
        whole = self._stratum(finding, code)
        return 1.0 / whole / self._drawn_weight(finding, code)

    def _stratum(self, finding: Finding, code: int) -> int:
        axes = self.prepared.plan.finding_axes[finding.number]
        return stratum_size(axes, code, self.prepared.windows[finding.number][code].count)

    def _positions(self) -> dict[str, NDArray[Any]]:
        parts: dict[str, list[NDArray[Any]]] = {
            name: [] for name in ("finding", "window", "position", "window_start", "window_end")
        }
        dates = np.array(self.prepared.dataset.calendar.dates, dtype="datetime64[D]")
        for number, found in enumerate(self.prepared.windows):
            for code, positions in found.items():
                count = positions.count
                parts["finding"].append(np.full(count, number))
                parts["window"].append(np.full(count, self._codes["window"][code]))
                parts["position"].append(np.arange(count))
                parts["window_start"].append(dates[positions.first])
                parts["window_end"].append(dates[positions.last])
        return {name: np.concatenate(arrays) for name, arrays in parts.items()}

    def _planned(self, rows: Ints) -> dict[str, NDArray[Any]]:
        planned = self.prepared.rows
        return {
            "finding": planned.finding[rows],
            "spec_high": planned.high[rows],
            "spec_low": planned.low[rows],
            "position": planned.position[rows],
            "request": planned.request[rows],
        }

    def _batch(self, rows: Ints, fields: dict[str, NDArray[Any]]) -> dict[str, NDArray[Any]]:
        planned = self.prepared.rows
        codes = {axis: self._codes[axis][planned.codes[axis][rows]] for axis in AXES}
        return {**self._planned(rows), **codes, **fields}

    def _write_ruled(self, rows: Ints) -> None:
        if not rows.size:
            return
        plan = self.prepared.plan
        codes = np.array(
            [
                self._writer.register_reason(Status.NOT_APPLICABLE, rule.because, ruled=True)
                for rule in plan.rules
            ]
        )
        fields = _empty(rows.size, Status.NOT_APPLICABLE)
        fields["reason"] = codes[self.prepared.rows.rule[rows]]
        self._writer.write(self.sweep, self._batch(rows, fields))

    def _details(self, parts: list[LagCoefficients]) -> dict[str, NDArray[Any]] | None:
        if not parts:
            return None
        row = np.concatenate([part.row for part in parts])
        planned = self.prepared.rows
        reverse = np.concatenate([part.reverse for part in parts])
        return {
            "finding": planned.finding[row],
            "spec_high": planned.high[row],
            "spec_low": planned.low[row],
            "kind": np.where(reverse, "reverse lag coefficient", "lag coefficient"),
            "position": np.concatenate([part.lag for part in parts]),
            "date": np.full(row.size, np.datetime64("NaT", "D")),
            "value": np.concatenate([part.value for part in parts]),
            "standard_error": np.concatenate([part.error for part in parts]),
            "p_value": np.concatenate([part.p_value for part in parts]),
            "critical_value": np.full(row.size, np.nan),
        }


def _test_group(choice: Choice) -> tuple[object, int]:
    """Return what tests of one quantity in several dresses share: covariance and extra lags."""
    assert isinstance(choice, ProcedureChoice)
    return choice.sandwich, choice.extra_lags


def stored_numerics() -> str:
    """Return the versions that stored rows are matched on: engine, procedures, screens."""
    screens = [f"{name} {screen.NUMERICS}" for name, screen in sorted(SCREENS.items())]
    return f"{numerics()}; screens: {', '.join(screens)}"


def _orientation(finding: Finding, choice: Choice) -> int:
    """Return -1 where an inverted measure of the cause or the effect turns the sign."""
    if not isinstance(choice, MeasureChoice):
        return 1
    turned = sum(role in choice.inverted for role in (finding.cause, finding.effect))
    return -1 if turned % 2 else 1


def _scale_group(axis: str, choice: Choice) -> str:
    if axis in ("transformation", "measures"):
        return choice.label
    return "lag coefficients" if axis == "test" else ""


def _empty(count: int, status: Status) -> dict[str, NDArray[Any]]:
    """Return the fields of rows without numbers."""
    numbers = (
        "statistic", "df_den", "p_value", "coefficient_sum", "coefficient_sum_se",
        "signed_partial_r2", "standardised_sum", "reverse_statistic", "reverse_p_value",
        "reverse_coefficient_sum", "order_used", "observations", "df_num",
    )  # fmt: skip
    fields: dict[str, NDArray[Any]] = {name: np.full(count, np.nan) for name in numbers}
    fields["computation"] = np.zeros(count, np.uint64)
    for name in ("solver", "failed_mask", "reverse_failed_mask"):
        fields[name] = np.zeros(count, np.int32)
    for name in ("status", "reverse_status"):
        fields[name] = np.full(count, int(status), np.int8)
    return fields


def _data_note(prepared: Prepared) -> dict[str, Any]:
    """Return what a reader must know of the data; no path beyond what the plan says."""
    data, dataset = prepared.plan.document.data, prepared.dataset
    calendar = dataset.calendar
    return {
        "file": data.file,
        "sha256": dataset.file_digest,
        "source": data.source,
        "licence": data.licence,
        "frequency": data.frequency,
        "rows": len(calendar),
        "first": calendar.label(0),
        "last": calendar.label(len(calendar) - 1),
        "series": ", ".join(dataset.names),
        "same numbers": list(prepared.notes),
    }


def package_versions() -> dict[str, str]:
    """Return the versions that numbers may depend on."""
    found = {"python": python_version(), "platform": platform()}
    for name in ("crosswind", "numpy", "scipy", "duckdb", "pandas", "altair"):
        try:
            found[name] = version(name)
        except PackageNotFoundError:
            found[name] = "not installed"
    return found


assert max(Reason) < RULED
