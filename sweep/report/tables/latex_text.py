"""Any text as LaTeX that pdflatex sets: ASCII only, nothing left that it would read as a command.

Accents are composed, mathematical signs and Greek letters become mathematics.  What the fonts of
pdflatex do not have is written as its code points in brackets, so that nothing is lost in
silence; the writer of tables says so in the notes.
"""

from __future__ import annotations

import unicodedata

__all__ = ["LONG", "TOGETHER", "code_points", "escaped", "spelt"]

_SPECIAL = {
    "\\": r"\textbackslash{}",
    "{": r"\{",
    "}": r"\}",
    "$": r"\$",
    "&": r"\&",
    "#": r"\#",
    "%": r"\%",
    "_": r"\_\allowbreak{}",
    "/": r"/\allowbreak{}",
    "^": r"\textasciicircum{}",
    "~": r"\textasciitilde{}",
    "<": r"\textless{}",
    ">": r"\textgreater{}",
    "|": r"\textbar{}",
    '"': "''",
    "`": r"\`{}",
}

# Two of them in a row would make another sign.
_JOINING = "-',"

_SIGNS = {
    "\u2010": "-", "\u2011": "-", "–": "--", "—": "---", "―": "---", "…": r"\ldots{}",
    "‘": "`{}", "’": "'", "“": "``{}", "”": "''", "‚": ",", "′": "$'$", "″": "$''$",
    "‹": r"\textless{}", "›": r"\textgreater{}", "§": r"\S{}", "¶": r"\P{}", "©": r"\copyright{}",
    "®": r"\textregistered{}", "™": r"\texttrademark{}", "£": r"\pounds{}", "€": r"\texteuro{}",
    "¡": "!`", "¿": "?`", "\u00a0": "~", "\u202f": "~", "\u2009": r"\,", "½": "1/2", "¼": "1/4",
    "¾": "3/4", "ß": r"\ss{}", "æ": r"\ae{}", "Æ": r"\AE{}", "œ": r"\oe{}", "Œ": r"\OE{}",
    "ø": r"\o{}", "Ø": r"\O{}", "ł": r"\l{}", "Ł": r"\L{}", "ı": r"\i{}",
}  # fmt: skip

# In mathematics.
_MATHS = {
    "−": "-", "×": r"\times", "÷": r"\div", "±": r"\pm", "·": r"\cdot", "•": r"\bullet",
    "≤": r"\leq", "≥": r"\geq", "≠": r"\neq", "≈": r"\approx", "≡": r"\equiv", "∼": r"\sim",
    "∞": r"\infty", "∂": r"\partial", "∆": r"\Delta", "∑": r"\sum", "∏": r"\prod",
    "√": r"\surd", "∫": r"\int", "∈": r"\in", "∩": r"\cap", "∪": r"\cup", "¬": r"\neg",
    "∧": r"\wedge", "∨": r"\vee", "→": r"\rightarrow", "←": r"\leftarrow",
    "↔": r"\leftrightarrow", "↑": r"\uparrow", "↓": r"\downarrow", "⇒": r"\Rightarrow",
    "⇔": r"\Leftrightarrow", "°": r"^{\circ}", "◆": r"\diamond", "◇": r"\diamond",
    "○": r"\circ", "●": r"\bullet", "µ": r"\mu", "∗": r"\ast", "∀": r"\forall", "∃": r"\exists",
}  # fmt: skip

_GREEK = {
    "α": "alpha", "β": "beta", "γ": "gamma", "δ": "delta", "ε": "varepsilon", "ζ": "zeta",
    "η": "eta", "θ": "theta", "ι": "iota", "κ": "kappa", "λ": "lambda", "μ": "mu", "ν": "nu",
    "ξ": "xi", "π": "pi", "ρ": "rho", "σ": "sigma", "ς": "varsigma", "τ": "tau",
    "υ": "upsilon", "φ": "varphi", "χ": "chi", "ψ": "psi", "ω": "omega", "Γ": "Gamma",
    "Δ": "Delta", "Θ": "Theta", "Λ": "Lambda", "Ξ": "Xi", "Π": "Pi", "Σ": "Sigma",
    "Υ": "Upsilon", "Φ": "Phi", "Ψ": "Psi", "Ω": "Omega", "ϵ": "epsilon", "ϕ": "phi",
}  # fmt: skip

# Capitals and omicron that mathematics sets like Latin letters.
_LATIN_LOOKS = dict(zip("ΑΒΕΖΗΙΚΜΝΟΡΤΧο", "ABEZHIKMNOPTXo", strict=True))

# Letters of the T1 encoding alone, which LaTeX knows even where a document does not ask for it.
_T1 = {
    "đ": r"\dj", "Đ": r"\DJ", "ð": r"\dh", "Ð": r"\DH", "þ": r"\th", "Þ": r"\TH", "ŋ": r"\ng",
    "Ŋ": r"\NG", "«": r"\guillemotleft", "»": r"\guillemotright", "„": r"\quotedblbase",
}  # fmt: skip

# Combining mark and the command that puts it on a letter.
_ACCENTS = {
    "\u0300": r"\`", "\u0301": r"\'", "\u0302": r"\^", "\u0303": r"\~", "\u0304": r"\=",
    "\u0306": r"\u", "\u0307": r"\.", "\u0308": r"\"", "\u030a": r"\r", "\u030b": r"\H",
    "\u030c": r"\v", "\u0323": r"\d", "\u0327": r"\c", "\u0331": r"\b",
}  # fmt: skip
_MATHS_ACCENTS = {"\u0300": r"\grave", "\u0301": r"\acute", "\u0308": r"\ddot"}
_OGONEK = "\u0328"

# A word of more letters than LONG may be broken, so that no column runs into the next; so many
# of its letters stay together.
LONG, TOGETHER = 16, 10


def escaped(text: str) -> str:
    r"""Return a text as LaTeX, white space made single.

    Parameters
    ----------
    text : str
        Any text.

    Examples
    --------
    >>> print(escaped("50% of $x_1$ & y"))
    50\% of \$x\_\allowbreak{}1\$ \& y
    >>> print(escaped("χ² ≤ Škoda"))
    $\chi$$^{2}$ $\leq$ \v{S}koda
    >>> print(escaped("рост 3"))
    [U+0440 U+043E U+0441 U+0442] 3
    """
    words = []
    for word in text.split():
        pieces = _pieces(word)
        if len(word) > LONG:
            pieces = [
                piece + (r"\allowbreak{}" if place % TOGETHER == TOGETHER - 1 else "")
                for place, piece in enumerate(pieces)
            ]
        words.append("".join(pieces))
    return " ".join(word for word in words if word)


def spelt(text: str) -> str:
    """Return a text with what pdflatex does not have as code points, before it is LaTeX."""
    if text.isascii():
        return text
    found = []
    for letter, marks in _clusters(unicodedata.normalize("NFD", text)):
        if letter.isspace() or _piece(letter, marks) is not None:
            found.append(letter + marks)
        else:
            found.append("".join(f"[U+{ord(one):04X}] " for one in (letter, *marks)))
    return "".join(found)


def code_points(latex: str) -> bool:
    """Say whether :func:`escaped` wrote code points into a text."""
    return "[U+" in latex


def _pieces(word: str) -> list[str]:
    """Return the LaTeX of each letter with its marks; unknown letters in a row together."""
    pieces: list[str] = []
    unknown: list[str] = []
    last = ""
    for letter, marks in _clusters(unicodedata.normalize("NFD", word)):
        piece = _piece(letter, marks)
        if piece is None:
            unknown += [f"U+{ord(one):04X}" for one in (letter, *marks)]
            continue
        pieces += [f"[{' '.join(unknown)}]"] if unknown else []
        unknown = []
        pieces.append(f"{{}}{piece}" if letter == last and letter in _JOINING else piece)
        last = letter
    return [*pieces, f"[{' '.join(unknown)}]"] if unknown else pieces


def _clusters(text: str) -> list[tuple[str, str]]:
    """Split decomposed text into letters with the marks that follow them."""
    found: list[tuple[str, str]] = []
    for sign in text:
        if unicodedata.combining(sign) and found:
            letter, marks = found[-1]
            found[-1] = (letter, marks + sign)
        elif unicodedata.category(sign) not in ("Cf", "Cc"):
            # Marks of direction and other controls are not seen, so nothing stands for them.
            found.append((sign, ""))
    return found


def _piece(letter: str, marks: str) -> str | None:
    """Return one letter with its marks, None where the fonts do not have it."""
    plain = _letter(letter)
    if plain is None or not marks:
        return plain
    if letter in _GREEK or letter in _LATIN_LOOKS:
        if any(mark not in _MATHS_ACCENTS for mark in marks):
            return None
        for mark in marks:
            plain = f"${_MATHS_ACCENTS[mark]}{{{plain.strip('$')}}}$"
        return plain
    for mark in marks:
        if mark == _OGONEK:
            plain = rf"{{\fontencoding{{T1}}\selectfont\k{{{plain}}}}}"
        elif mark in _ACCENTS:
            plain = f"{_ACCENTS[mark]}{{{_DOTLESS.get(plain, plain)}}}"
        else:
            return None
    return plain


_DOTLESS = {"i": r"\i", "j": r"\j"}


def _letter(letter: str) -> str | None:
    if letter in _SPECIAL:
        return _SPECIAL[letter]
    if " " <= letter <= "~":
        return letter
    if letter in _SIGNS:
        return _SIGNS[letter]
    if letter in _MATHS:
        return f"${_MATHS[letter]}$"
    if letter in _GREEK:
        return f"$\\{_GREEK[letter]}$"
    if letter in _LATIN_LOOKS:
        return _LATIN_LOOKS[letter]
    if letter in _T1:
        return rf"{{\fontencoding{{T1}}\selectfont{_T1[letter]}{{}}}}"
    return _compatible(letter)


def _compatible(letter: str) -> str | None:
    """Return what stands for a letter of another width or place, such as ² or ﬁ."""
    kind, _, codes = unicodedata.decomposition(letter).partition("> ")
    if not codes:
        return None
    inner = [_letter(chr(int(code, 16))) for code in codes.split()]
    if None in inner:
        return None
    text = "".join(piece for piece in inner if piece is not None)
    if kind in ("<super", "<sub"):
        side = "^" if kind == "<super" else "_"
        return f"${side}{{{text.strip('$')}}}$"
    return text
