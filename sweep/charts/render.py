"""Charts as files: SVG, PNG and PDF drawn without a browser or a network."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    import altair

__all__ = ["language_version", "pdf", "png", "specification", "svg"]


def language_version() -> str:
    """Return the version of the chart language that the installed libraries share."""
    import altair

    return ".".join(altair.SCHEMA_VERSION.removeprefix("v").split(".")[:2])


def specification(chart: altair.LayerChart) -> dict[str, Any]:
    """Return a chart as plain JSON values."""
    plain: dict[str, Any] = chart.to_dict()
    return plain


def svg(chart: altair.LayerChart) -> str:
    """Draw a chart as SVG text."""
    import vl_convert

    return str(vl_convert.vegalite_to_svg(specification(chart), vl_version=language_version()))


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
            scale=dots_per_inch / 96,
            ppi=dots_per_inch,
        )
    )


def pdf(chart: altair.LayerChart) -> bytes:
    """Draw a chart as PDF at its print size."""
    import vl_convert

    return bytes(vl_convert.vegalite_to_pdf(specification(chart), vl_version=language_version()))
