"""A chart that shows itself in a notebook without a network: as SVG, with PNG beside it.

The drawing library's own display fetches scripts from elsewhere.  A front-end takes the richest
form that it may show; one that does not trust a notebook passes SVG over and takes the PNG.
"""

from __future__ import annotations

from base64 import b64encode
from typing import Any

import altair

from .render import png, svg

__all__ = ["ShownChart"]

DOTS_PER_INCH = 96
"""A pixel of the picture for a pixel of the page; the SVG is the sharp one."""


class ShownChart(altair.LayerChart):
    """A chart of this package; everything that the drawing library does with one works."""

    def _repr_mimebundle_(self, *args: Any, **kwargs: Any) -> tuple[dict[str, Any], dict[str, Any]]:
        """Return the picture in every form that a notebook may show."""
        plain = self.to_dict(validate=False)
        pictures = {
            "image/svg+xml": svg(plain),
            "image/png": b64encode(png(plain, DOTS_PER_INCH)).decode("ascii"),
            "text/plain": plain.get("description", "A chart"),
        }
        return pictures, {}
