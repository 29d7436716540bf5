"""The drawing library as one script, fetched in a process of its own while others work.

Putting the script together takes two seconds of one core; a run spends longer than that with
a core to spare, so the command starts it first and takes it up when the report is written.
"""

from __future__ import annotations

import functools
import subprocess
import sys
from types import TracebackType

from markupsafe import Markup

from sweep.charts.render import language_version

__all__ = ["Library", "library_script"]


@functools.cache
def library_script() -> str:
    """Return the drawing library, a function ``drawFigure`` at its end; made once a process."""
    import vl_convert

    return str(
        vl_convert.javascript_bundle(
            "window.drawFigure = vegaEmbed;", vl_version=language_version()
        )
    )


class Library:
    """The drawing library, being fetched.

    Use as a context: leaving it ends the fetching process if it still runs.
    """

    def __init__(self) -> None:
        self._process: subprocess.Popen[str] | None = None

    def __enter__(self) -> Library:
        self._process = subprocess.Popen(
            [sys.executable, "-m", __name__],
            stdout=subprocess.PIPE, stderr=subprocess.DEVNULL, text=True, encoding="utf-8",
        )  # fmt: skip
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        if self._process is not None:
            self._process.kill()
            self._process.communicate()

    def script(self) -> Markup:
        """Return the script, safe inside its element; made here where the process failed."""
        code = ""
        if self._process is not None:
            code, _ = self._process.communicate()
            if self._process.returncode:
                code = ""
            self._process = None
        # A closing tag inside the code, if a version ever holds one, would end the element.
        return Markup((code or library_script()).replace("</script", "<\\/script"))


if __name__ == "__main__":
    sys.stdout.reconfigure(encoding="utf-8")  # type: ignore[union-attr]
    sys.stdout.write(library_script())
