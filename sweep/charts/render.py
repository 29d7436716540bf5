"""Charts as files: SVG, PNG and PDF drawn without a browser or a network."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING, Any

from .drawing import NotDrawn, draw

if TYPE_CHECKING:
    import altair

    Chart = altair.LayerChart | dict[str, Any]

__all__ = ["altair_chart", "language_version", "pdf", "png", "specification", "svg"]


def language_version() -> str:
    """Return the version of the chart language that the installed libraries share."""
    import altair

    return ".".join(altair.SCHEMA_VERSION.removeprefix("v").split(".")[:2])


def altair_chart(plain: dict[str, Any]) -> altair.LayerChart:
    """Return a chart as an object of the drawing library that shows itself offline."""
    from altair.utils.schemapi import debug_mode

    from .shown import ShownChart

    with debug_mode(False):  # the tests hold every chart against the language's schema
        chart: altair.LayerChart = ShownChart.from_dict(plain, validate=False)
    return chart


def specification(chart: Chart) -> dict[str, Any]:
    """Return a chart as plain JSON values.

    The charts of this package are checked against the language's schema in the tests; doing
    so for every drawing would double its time.
    """
    if isinstance(chart, dict):
        return chart
    plain: dict[str, Any] = chart.to_dict(validate=False)
    return plain


def svg(chart: Chart) -> str:
    """Draw a chart, or its specification, as SVG text."""
    plain = specification(chart)
    try:
        return draw(plain)
    except (NotDrawn, LookupError, TypeError):  # a chart that was changed by other means
        import vl_convert

        return str(vl_convert.vegalite_to_svg(plain, vl_version=language_version()))


def png(chart: Chart, dots_per_inch: float = 300) -> bytes:
    """Draw a chart as PNG at its print size.

    Parameters
    ----------
    chart : altair.LayerChart or dict
        A chart of this package; its lengths are pixels at 96 to the inch.
    dots_per_inch : float
        Resolution of the picture.
    """
    import vl_convert

    return bytes(
        vl_convert.svg_to_png(
            svg(chart),
            scale=72 / 96,  # the drawer takes a pixel for a point at this resolution
            ppi=dots_per_inch,
        )
    )


def pdf(chart: Chart) -> bytes:
    """Draw a chart as PDF at its print size (a pixel is 1/96 of an inch, a point 1/72)."""
    import vl_convert

    def points(match: re.Match[str]) -> str:
        return f'{match[1]}="{float(match[2]) * 72 / 96:.4f}"'

    # The drawing keeps its own units in viewBox; only the size of the page is set in points.
    head, rest = svg(chart).split(">", 1)
    head = re.sub(r'\b(width|height)="([\d.]+)"', points, head)
    return bytes(vl_convert.svg_to_pdf(f"{head}>{rest}"))
