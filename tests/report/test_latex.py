"""Tables as LaTeX: what is escaped, where decimals stand, and that pdflatex sets every table."""

from __future__ import annotations

import os
import re
import shutil
import subprocess
import unicodedata
from pathlib import Path

import pytest

from sweep.charts.context import context_of
from sweep.report.tables import TABLES, Column, Table
from sweep.report.tables.latex import as_latex
from sweep.report.tables.latex_layout import fit, heading_lines, width_of
from sweep.report.tables.latex_text import escaped
from sweep.report.tables.model import Pooled

REQUIRED = os.environ.get("CROSSWIND_LATEX") == "required"
HOSTILE = r"\input{/etc/passwd} $x^2$ 50% #1 & _a_ {b} ~c [2] *d \\ --- ?` << | \" '' \write18{ls}"
FOREIGN = (
    "Škoda Łódź ąę İstanbul naïve æøå ß đ «q» α χ² Ελλάδα рост 漢字 😀 \u202eevil\u202c "
    "\u200bz R² ½ …"
)


def needs_pdflatex() -> str:
    """Return the path of pdflatex; skip with the reason where there is none."""
    found = shutil.which("pdflatex")
    if found is None and not REQUIRED:
        pytest.skip("there is no pdflatex (apt-get install texlive-latex-recommended)")
    assert found is not None, "CROSSWIND_LATEX is required and there is no pdflatex"
    return found


def compiled(folder: Path, body: str, packages: str = "array,booktabs,longtable,pdflscape") -> str:
    """Set a document of that body until it is settled and return its log."""
    program = needs_pdflatex()
    text = (
        "\\documentclass[a4paper]{article}\n\\usepackage[a4paper,margin=25mm]{geometry}\n"
        f"\\usepackage{{{packages}}}\n\\begin{{document}}\n{body}\n\\end{{document}}\n"
    )
    (folder / "whole.tex").write_text(text, encoding="ascii")
    log = ""
    for _ in range(5):
        done = subprocess.run(
            [program, "-interaction=nonstopmode", "-halt-on-error", "-no-shell-escape", "whole"],
            cwd=folder, capture_output=True, check=False,
        )  # fmt: skip
        log = (folder / "whole.log").read_text(encoding="latin-1")
        assert done.returncode == 0, log[-3000:]
        if "Rerun" not in log:
            return log
    raise AssertionError("the document does not settle")


def sweep_of(sweeps, kind: str):
    if kind == "usual":
        return sweeps.Sweep(lags=["4", "1", "AIC"], transformation=["log difference", "log"])
    if kind == "hostile":
        return sweeps.Sweep(
            cause=HOSTILE, effect=FOREIGN, lags=["4", HOSTILE],
            deterministics=["constant", FOREIGN],
            window=["full sample", HOSTILE], moving={HOSTILE: ("rolling", 60, 4)},
            transformation=["log", "a_very_long_name_of_a_transformation_without_a_single_space"],
            test=["F", "W" * 60], conditioning=["given"], centre=2.4,
        )  # fmt: skip
    return sweeps.crowded(90)


@pytest.mark.parametrize("kind", ["usual", "hostile", "many"])
def test_pdflatex_sets_every_table(sweeps, tmp_path, kind):
    sweep = sweep_of(sweeps, kind)
    frames = sweeps.frames_of(sweep)
    context = context_of(
        sweeps.finding_of(sweep), frames["survival"], significance=0.05, title="A title"
    )
    parts = []
    for module in TABLES.values():
        table = module.build(frames, context)
        for one in (table, table.with_stars()):
            written = as_latex(one).replace("\\label{tab:", f"\\label{{tab:{len(parts)}-")
            assert written.isascii()
            parts.append(written)
    log = compiled(tmp_path, "\n\\clearpage\n".join(parts))
    assert "Overfull \\hbox" not in log, "no table may reach past the edge of its page"
    warnings = [line for line in log.splitlines() if "LaTeX Warning" in line]
    assert not [line for line in warnings if "float" not in line.lower()], warnings
    assert (tmp_path / "whole.pdf").stat().st_size > 10_000


def test_every_table_says_what_it_needs(tmp_path):
    """With the packages of its own first line, and no others, a part compiles."""
    columns = (Column("Name"), Column("p", "p"))
    short = Table("s", "Short", columns, (("a", 0.5),), ("A note.",))
    long = Table("l", "Long", columns, tuple((f"row {n}", 0.5) for n in range(90)), ("A note.",))
    wide = Table("w", "Wide", tuple(Column(f"Column {n}") for n in range(14)),
                 (("several words of text",) * 14,), ("A note.",))  # fmt: skip
    for number, table in enumerate((short, long, wide)):
        text = as_latex(table)
        packages = re.search(r"\\usepackage\{([a-z,]+)\}", text).group(1)
        assert ("longtable" in packages) == (table is not short)
        assert ("pdflscape" in packages) == (table is wide)
        folder = tmp_path / str(number)
        folder.mkdir()
        compiled(folder, text, packages)


def test_every_letter_of_the_basic_plane_compiles(tmp_path):
    """One of each: whatever is not a letter of pdflatex's fonts becomes its code point."""
    every = (chr(code) for code in range(0x21, 0x3000))
    letters = [letter for letter in every if unicodedata.category(letter)[0] != "C"]
    lines = [" ".join(letters[at : at + 40]) for at in range(0, len(letters), 40)]
    text = "\n\n".join(escaped(line) for line in lines)
    assert text.isascii()
    compiled(tmp_path, f"\\raggedright {text}")


@pytest.mark.parametrize(
    ("text", "latex"),
    [
        ("a_b", r"a\_\allowbreak{}b"),
        (r"\input{x}", r"\textbackslash{}input\{x\}"),
        ("100% & $5 #1 ~ ^", r"100\% \& \$5 \#1 \textasciitilde{} \textasciicircum{}"),
        ("a--b ''c", r"a-{}-b '{}'c"),
        ('<"x">', r"\textless{}''x''\textgreater{}"),
        ("−1.5 → 2", r"$-$1.5 $\rightarrow$ 2"),
        ("χ²(4)", r"$\chi$$^{2}$(4)"),
        ("ą é", r"{\fontencoding{T1}\selectfont\k{a}} \'{e}"),
        ("  two\n\twords ", "two words"),
        ("漢字x", "[U+6F22 U+5B57]x"),
        ("\u202ea\u200b", "a"),
        ("", ""),
    ],
)
def test_text_is_escaped(text, latex):
    assert escaped(text) == latex


def test_composed_and_decomposed_letters_are_one():
    assert escaped("é") == escaped("e\u0301") == r"\'{e}"


NUMBERS = Table(
    "numbers", "Numbers",
    (Column("Name"), Column("p", "p", starred=True), Column("Value", "number"),
     Column("Share", "share"), Column("Rows", "count")),
    (("[a]", 0.0004, 0.0123, 0.9999, 1200), ("*b", 0.04, 12.3, 0.5, 7),
     ("c", Pooled(0.004), 2.5e-9, None, None), ("d", None, -1234.5, 0.0, 0)),
    ("A note.",), grouped=False,
)  # fmt: skip


def body(table: Table) -> list[list[str]]:
    """The cells between the rules."""
    text = as_latex(table)
    inner = text.split(r"\midrule")[1].split(r"\bottomrule")[0]
    return [line.removesuffix(r" \\").split(" & ") for line in inner.strip().splitlines()]


def test_decimals_stand_below_each_other():
    rows = body(NUMBERS)
    assert [row[1] for row in rows] == [r"\textless{}0.001", "0.040", "0.004", "--"]
    assert [row[2] for row in rows] == [
        "0.0123", r"12.3\phantom{000}", r"2.5$\times10^{-9}$", r"$-$1,234\phantom{.0000}",
    ]  # fmt: skip
    assert [row[3] for row in rows] == [r"\textgreater{}99\%", r"50\%", "--", r"0\%"]
    assert [row[4] for row in rows] == ["1,200", "7", "--", "0"]


def test_a_row_never_opens_with_an_argument_of_the_row_before():
    rows = body(NUMBERS)
    assert rows[0][0] == "{}[a]"
    assert rows[1][0] == "{}*b"


def test_stars_are_off_unless_asked_for_and_never_on_medians():
    assert "^{*" not in as_latex(NUMBERS)
    starred = NUMBERS.with_stars()
    cells = [row[1] for row in body(starred)]
    assert cells[0] == r"\textless{}0.001$^{***}$"
    assert cells[1] == r"0.040$^{**}$\phantom{$^{*}$}"
    assert cells[2] == r"0.004\phantom{$^{***}$}"
    assert starred.notes[-1].startswith("Stars: * p at most 0.10")
    assert "\\*\\*\\*" in starred.text("markdown")
    assert "**" not in starred.text("csv")


def test_a_table_without_p_values_says_that_it_has_no_stars():
    table = Table("t", "T", (Column("A"),), (("a",),), ("A note.",)).with_stars()
    assert table.notes[-1] == "No column of this table is marked by stars."


def test_code_points_are_explained_in_the_notes():
    table = Table("t", "T", (Column("A"),), (("漢字",),), ("A note.",))
    assert "Codes such as [U+0041] stand for letters" in as_latex(table)
    assert "Codes such as" not in as_latex(NUMBERS)


def test_rules_notes_and_captions_are_where_they_belong():
    text = as_latex(NUMBERS)
    for part in (r"\toprule", r"\midrule", r"\bottomrule"):
        assert text.count(part) == 1
    assert r"\hline" not in text
    assert "|" not in re.search(r"\\begin\{tabular\}\{(.*)\}", text).group(1)
    assert text.index(r"\caption{Numbers}\label{tab:numbers}") < text.index(r"\toprule")
    assert text.index(r"\bottomrule") < text.index(r"\begin{minipage}") < text.index("A note.")


def test_wide_and_long_tables_get_pages_of_their_own():
    columns = [Column(f"A long heading {n}") for n in range(12)]
    texts = [["some words in a cell"] * 12]
    assert fit(columns, texts, 0).wide
    assert not fit(columns[:3], [row[:3] for row in texts], 0).wide
    long = Table("t", "T", (Column("A"),), tuple((f"r{n}",) for n in range(100)), ("N.",))
    text = as_latex(long)
    assert r"\begin{longtable}" in text
    assert r"\endlastfoot" in text
    assert text.index("N.") < text.index(r"\endlastfoot"), "notes stand in the last foot"


def test_widths_are_those_of_the_type(tmp_path):
    """The widths that the layout reckons with are those that TeX finds, within two per cent."""
    needs_pdflatex()
    texts = ["constant and seasonal dummies", "0.123456789", "WWW MMM iii", "rolling 120, HC3"]
    boxes = "\n".join(
        rf"\setbox0\hbox{{\footnotesize {escaped(text)}}}\typeout{{measured=\the\wd0}}"
        for text in texts
    )
    log = compiled(tmp_path, boxes + "x")
    found = [float(value) for value in re.findall(r"measured=([\d.]+)pt", log)]
    for text, width in zip(texts, found, strict=True):
        assert width_of(text, 8.0) == pytest.approx(width, rel=0.02)


def test_headings_break_between_words_only():
    column = Column("Sum of the coefficients", "number")
    narrow = heading_lines(column, 10.0, 8.0)
    assert " ".join(narrow) == column.heading
    assert narrow == ["Sum of", "the", "coefficients"]
    assert heading_lines(column, 500.0, 8.0) == [column.heading]
