"""Charts as files: SVG, PNG and PDF drawn without a browser or a network."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    import altair

__all__ = ["language_version", "pdf", "png", "specification", "svg"]


def language_version() -> str:
    """Return the version of the chart language that the installed libraries share."""
    import altair

    return ".".join(altair.SCHEMA_VERSION.removeprefix("v").split(".")[:2])


def specification(chart: altair.LayerChart) -> dict[str, Any]:
    """Return a chart as plain JSON values.

    The charts of this package are checked against the language's schema in the tests; doing
    so for every drawing would double its time.
    """
    plain: dict[str, Any] = chart.to_dict(validate=False)
    return plain


def svg(chart: altair.LayerChart | dict[str, Any]) -> str:
    """Draw a chart, or its specification, as SVG text."""
    import vl_convert

    plain = chart if isinstance(chart, dict) else specification(chart)
    return str(vl_convert.vegalite_to_svg(plain, vl_version=language_version()))


def png(chart: altair.LayerChart, dots_per_inch: float = 300) -> bytes:
    """Draw a chart as PNG at its print size.

    Parameters
    ----------
    chart : altair.LayerChart
        A chart of this package; its lengths are pixels at 96 to the inch.
    dots_per_inch : float
        Resolution of the picture.
    """
    import vl_convert

    return bytes(
        vl_convert.vegalite_to_png(
            specification(chart),
            vl_version=language_version(),
            scale=72 / 96,  # the drawer takes a pixel for a point at this resolution
            ppi=dots_per_inch,
        )
    )


def pdf(chart: altair.LayerChart) -> bytes:
    """Draw a chart as PDF at its print size (a pixel is 1/96 of an inch, a point 1/72)."""
    import vl_convert

    def points(match: re.Match[str]) -> str:
        return f'{match[1]}="{float(match[2]) * 72 / 96:.4f}"'

    # The drawing keeps its own units in viewBox; only the size of the page is set in points.
    head, rest = svg(chart).split(">", 1)
    head = re.sub(r'\b(width|height)="([\d.]+)"', points, head)
    return bytes(vl_convert.svg_to_pdf(f"{head}>{rest}"))
