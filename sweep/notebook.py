"""How plans, checks, explanations and verifications show themselves in a notebook.

Plain HTML without scripts, styles from elsewhere or pictures, so that nothing is fetched; all
text from plans and data is escaped.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from html import escape
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from sweep.engine.check import Check
    from sweep.engine.explain import Explanation
    from sweep.engine.verify import Verification
    from sweep.plan.model import Plan

__all__ = [
    "check_html", "duration", "explanation_html", "number_words", "plan_html", "rows_html",
    "specifications", "verification_html",
]  # fmt: skip

SHOWN = 20
"""Disagreements that are listed."""
WORDS = {
    "p_value": "p-value", "reverse_p_value": "reverse p-value",
    "coefficient_sum_se": "its standard error", "signed_partial_r2": "signed partial R²",
    "lag_standard_error": "standard error of a lag", "df_num": "restrictions",
    "df_den": "degrees of freedom", "window": "window dates", "status": "status and reason",
}  # fmt: skip


def number_words(name: str) -> str:
    """Return what people call a number of the store.

    Examples
    --------
    >>> number_words("p_value"), number_words("coefficient_sum"), number_words("p_value, lag 2")
    ('p-value', 'coefficient sum', 'p-value, lag 2')
    """
    first, comma, rest = name.partition(",")
    return WORDS.get(first, first.replace("_", " ")) + comma + rest


def rows_html(columns: Sequence[str], rows: Iterable[Sequence[Any]], caption: str = "") -> str:
    """Return a table; numbers stand to the right."""
    head = "".join(f'<th scope="col">{escape(name)}</th>' for name in columns)
    body = "".join(f"<tr>{''.join(_cell(value) for value in row)}</tr>" for row in rows)
    title = f"<caption>{escape(caption)}</caption>" if caption else ""
    return f"<table>{title}<thead><tr>{head}</tr></thead><tbody>{body}</tbody></table>"


class _Figure(str):
    """A number that is written already."""


def _short(difference: float | None) -> _Figure:
    return _Figure("–" if difference is None else f"{difference:.0e}")


def _cell(value: Any) -> str:
    if value is None:
        return "<td></td>"
    if isinstance(value, _Figure):
        return f'<td style="text-align:right">{value}</td>'
    if isinstance(value, int | float) and not isinstance(value, bool):
        text = f"{value:,}" if isinstance(value, int) else f"{value:.6g}"
        return f'<td style="text-align:right">{text}</td>'
    return f"<td>{escape(str(value))}</td>"


def _lines(sentences: Iterable[str]) -> str:
    items = "".join(f"<li>{escape(sentence)}</li>" for sentence in sentences)
    return f"<ul>{items}</ul>" if items else ""


def _strong(text: str) -> str:
    return f"<p><strong>{escape(text)}</strong></p>"


def duration(seconds: float) -> str:
    """Write an estimated time, no finer than it deserves.

    Examples
    --------
    >>> duration(0.2), duration(12.3), duration(240), duration(7200)
    ('a few seconds', 'about 12 s', 'about 4 min', 'about 2.0 h')
    """
    if seconds < 5:
        return "a few seconds"
    if seconds < 90:
        return f"about {round(seconds)} s"
    if seconds < 5400:
        return f"about {round(seconds / 60)} min"
    return f"about {seconds / 3600:.1f} h"


def specifications(count: int) -> str:
    """Write a count of specifications.

    Examples
    --------
    >>> specifications(1), specifications(2400)
    ('1 specification', '2,400 specifications')
    """
    return f"{count:,} specification{'' if count == 1 else 's'}"


def plan_html(plan: Plan) -> str:
    """Return what a plan asks: its findings, and the choices of every axis."""
    design = plan.document.sweep.design
    words = design if isinstance(design, str) else f"a sample of {design.sample:,}"
    parts = [
        _strong(plan.title),
        f"<p>{escape(plan.document.data.file)}, {escape(plan.frequency.name)}; level "
        f"{plan.significance:g}; design {escape(str(words))}</p>",
        rows_html(
            ["finding", "in words", "claim"],
            [(f.name, f.sentence, f.claim) for f in plan.findings],
        ),
        rows_html(
            ["axis", "baseline", "choices"],
            [
                (axis, choices[plan.finding_axes[0][axis].baseline].label,
                 "; ".join(choice.label for choice in choices))
                for axis, choices in plan.axes.items()
            ],
        ),
        _lines(f"Ruled out: {rule.because}" for rule in plan.rules),
    ]  # fmt: skip
    return "".join(parts)


def check_html(check: Check) -> str:
    """Return the size of a plan, finding by finding."""
    parts = [_strong(check.plan.title), f"<p>{escape(str(check))}</p>"]
    for name, planned, to_run in check.findings:
        parts.append(
            rows_html(
                ["axis", "choices", "baseline", "positions"],
                [
                    (a.axis, len(a.choices), a.baseline,
                     a.positions if a.axis == "window" else None)
                    for a in check.axes
                    if a.finding == name
                ],
                f"{name}: {specifications(planned)}, {to_run:,} to run",
            )
        )  # fmt: skip
    parts.append(
        _lines(
            f"{item.finding}: ruled out are {specifications(item.specifications)}, because "
            f"{item.because}"
            for item in check.ruled_out
        )
    )
    return "".join([*parts, _lines(check.lowered), _lines(check.notes)])


def explanation_html(found: Explanation) -> str:
    """Return one specification in full: choices, sentences, stored beside recomputed."""
    parts = [
        _strong(found.statement),
        f"<p>Specification {escape(str(found.row['specification']))}</p>",
        rows_html(["axis", "choice", "because"], found.choices),
        _lines((*found.sample, *found.regression, f"Hypothesis: {found.null}.", *found.verdict)),
    ]
    if found.compared:
        parts.append(
            rows_html(
                ["number", "stored", "recomputed", "relative difference"],
                [
                    (number_words(c.name), c.stored, c.slow,
                     _short(c.difference))
                    for c in found.compared
                ],
                "Stored beside recomputed by least squares on the rows",
            )
        )  # fmt: skip
    if found.coefficients:
        cause = str(found.row["cause"])
        columns = ["lag", "coefficient", "standard error"]
        parts.append(rows_html(columns, found.coefficients, f"Coefficients of {cause}"))
    return "".join(parts)


def verification_html(found: Verification) -> str:
    """Return what came of recomputing a sample."""
    words = "every stored value came out again" if found.agrees else "stored values differ"
    parts = [
        _strong(f"{found.rows:,} of {found.stored:,} rows recomputed: {words}"),
        rows_html(
            ["number", "compared", "least squares", "statsmodels", "differing"],
            [
                (number_words(q.name), q.compared, _short(q.slow), _short(q.outside), q.differing)
                for q in found.quantities
                if q.compared
            ],
            "Largest relative difference from the stored number",
        ),
        _lines(
            f"{item.specification} ({item.finding}), {number_words(item.quantity)}: stored "
            f"{item.stored}, {item.by} gives {item.recomputed}"
            for item in found.disagreements[:SHOWN]
        ),
    ]
    return "".join(parts)
