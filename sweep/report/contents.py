"""The page's list of contents, read off its headings so that none is forgotten."""

from __future__ import annotations

import itertools
import re

__all__ = ["MARK", "with_contents"]

# Where the list goes.  Text from data cannot hold it: every angle bracket there is escaped.
MARK = "<!--contents-->"

_HEADING = re.compile(r"<(h2|h3)([^>]*)>(.*?)</\1>", flags=re.DOTALL)


def _anchor(parent: str, heading: str, taken: set[str]) -> str:
    words = re.sub(r"<[^>]*>|&[^;]*;", " ", heading).lower()
    name = f"{parent}-{re.sub(r'[^a-z0-9]+', '-', words).strip('-')}"
    free = (f"{name}-{n}" if n > 1 else name for n in itertools.count(1))
    return next(one for one in free if one not in taken)


def with_contents(page: str) -> str:
    """Give every heading an anchor and put the list of contents in the place of ``MARK``.

    Parameters
    ----------
    page : str
        HTML whose h2 have ids; h3 without one get it.  The parts of a finding, whose h2 has an
        id that begins with ``finding``, are listed below it.

    Examples
    --------
    >>> print(with_contents('<!--contents--><h2 id="finding-1">A</h2><h3>Size &amp; sign</h3>'))
    <ul><li><a href="#finding-1">A</a><ul><li><a href="#finding-1-size-sign">Size &amp; sign</a></li></ul></li></ul><h2 id="finding-1">A</h2><h3 id="finding-1-size-sign">Size &amp; sign</h3>
    """  # noqa: E501
    taken = set(re.findall(r'\bid="([^"]*)"', page))
    parts: list[tuple[str, str, list[tuple[str, str]]]] = []

    def placed(found: re.Match[str]) -> str:
        level, attributes, text = found.groups()
        own = re.search(r'\bid="([^"]*)"', attributes)
        if level == "h2":
            assert own is not None, f"the heading {text} has no id"
            parts.append((own[1], text, []))
            return found[0]
        anchor = own[1] if own else _anchor(parts[-1][0], text, taken)
        taken.add(anchor)
        parts[-1][2].append((anchor, text))
        return found[0] if own else f'<h3 id="{anchor}"{attributes}>{text}</h3>'

    page = _HEADING.sub(placed, page)
    items = []
    for anchor, text, below in parts:
        inner = "".join(f"<li>{_link(*one)}</li>" for one in below)
        nested = f"<ul>{inner}</ul>" if inner and anchor.startswith("finding") else ""
        items.append(f"<li>{_link(anchor, text)}{nested}</li>")
    return page.replace(MARK, f"<ul>{''.join(items)}</ul>", 1)


def _link(anchor: str, text: str) -> str:
    return f'<a href="#{anchor}">{text}</a>'
