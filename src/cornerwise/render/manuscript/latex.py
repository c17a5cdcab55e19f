"""A table as a LaTeX document that compiles as it stands: booktabs, longtable, every label escaped."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Sequence

from .document import Cell, Column, ManuscriptTable
from .layout import MARGIN_MM, PADDING_MM, Layout, layout
from .words import Run, Words

_ESCAPED = {
    "\\": r"\textbackslash{}", "{": r"\{", "}": r"\}", "$": r"\$", "&": r"\&", "#": r"\#", "%": r"\%",
    "_": r"\_", "^": r"\textasciicircum{}", "~": r"\textasciitilde{}", "<": r"\textless{}",
    ">": r"\textgreater{}", "|": r"\textbar{}", '"': r"\textquotedbl{}", "`": r"\textasciigrave{}",
    "\u00a0": "~", "\u200b": "{}",
}  # fmt: skip
_SYMBOLS = {
    "−": "-", "±": r"\pm", "×": r"\times", "·": r"\cdot", "≤": r"\leq", "≥": r"\geq", "≠": r"\neq",
    "≈": r"\approx", "→": r"\rightarrow", "←": r"\leftarrow", "∞": r"\infty", "½": r"\frac{1}{2}",
    "′": r"\prime", "°": r"{}^{\circ}", "²": "{}^{2}", "³": "{}^{3}", "⁻": "{}^{-}", "¹": "{}^{1}",
    "Γ": r"\Gamma", "Δ": r"\Delta", "∆": r"\Delta", "Θ": r"\Theta", "Λ": r"\Lambda", "Ξ": r"\Xi",
    "Π": r"\Pi", "Σ": r"\Sigma", "Φ": r"\Phi", "Ψ": r"\Psi", "Ω": r"\Omega",
    "α": r"\alpha", "β": r"\beta", "γ": r"\gamma", "δ": r"\delta", "ε": r"\varepsilon", "ζ": r"\zeta",
    "η": r"\eta", "θ": r"\theta", "ι": r"\iota", "κ": r"\kappa", "λ": r"\lambda", "μ": r"\mu", "µ": r"\mu",
    "ν": r"\nu", "ξ": r"\xi", "π": r"\pi", "ρ": r"\rho", "σ": r"\sigma", "τ": r"\tau", "υ": r"\upsilon",
    "φ": r"\varphi", "χ": r"\chi", "ψ": r"\psi", "ω": r"\omega",
}  # fmt: skip
_LETTERS = {
    "–": "--", "—": "---", "…": r"\ldots{}", "‘": "`", "’": "'", "“": "``", "”": "''", "•": r"\textbullet{}",
    "†": r"\dag{}", "‡": r"\ddag{}", "§": r"\S{}", "ß": r"\ss{}", "æ": r"\ae{}", "Æ": r"\AE{}",
    "ø": r"\o{}", "Ø": r"\O{}", "œ": r"\oe{}", "Œ": r"\OE{}", "ł": r"\l{}", "Ł": r"\L{}", "ı": r"\i{}",
    "å": r"\aa{}", "Å": r"\AA{}",
}  # fmt: skip
_ACCENTS = {
    "\u0300": "`", "\u0301": "'", "\u0302": "^", "\u0303": "~", "\u0304": "=", "\u0306": "u", "\u0307": ".",
    "\u0308": '"', "\u030a": "r", "\u030b": "H", "\u030c": "v", "\u0323": "d", "\u0327": "c", "\u0331": "b",
}  # fmt: skip
_FACES = {
    "plain": "{}", "italic": r"\textit{{{}}}", "bold": r"\textbf{{{}}}",
    "subscript": r"\textsubscript{{{}}}", "superscript": r"\textsuperscript{{{}}}",
}  # fmt: skip
_LIGATURES = re.compile("(?<=-)(?=-)|(?<=,)(?=,)|(?<=')(?=')")
_BREAKS_AFTER = frozenset("/+:;,_-.= ")
_PREAMBLE = r"""% Compiles as it stands: pdflatex, twice for the widths of the columns.
% To use the table alone, take the packages below and what stands between the two lines of dashes.
\documentclass[10pt]{article}
\usepackage[utf8]{inputenc}
\usepackage{textcomp}
\IfFileExists{lmodern.sty}{\usepackage[T1]{fontenc}\usepackage{lmodern}}{}
\DeclareTextSymbolDefault{\textquotedbl}{T1}
\usepackage{array}
\usepackage{booktabs}
\usepackage{longtable}
\usepackage[singlelinecheck=false,justification=raggedright,labelsep=period,labelfont=bf]{caption}
"""


def escaped(text: str, *, breaks: bool = False) -> str:
    """Text as LaTeX prints it; a character it has no letter for is named by its number.

    Parameters
    ----------
    text : str
        Any text on one line.
    breaks : bool, optional
        Let a line end after a slash and the like.
    """
    pieces = []
    for letter in unicodedata.normalize("NFC", _LIGATURES.sub("\u200b", text)):
        pieces.append(_letter(letter))
        if breaks and letter in _BREAKS_AFTER:
            pieces.append(r"\allowbreak{}")
    return "".join(pieces)


def _letter(letter: str) -> str:
    if letter in _ESCAPED:
        return _ESCAPED[letter]
    if letter.isascii() and letter.isprintable():
        return letter
    if letter in _SYMBOLS:
        return rf"\ensuremath{{{_SYMBOLS[letter]}}}"
    return _LETTERS.get(letter) or _accented(letter)


def _accented(letter: str) -> str:
    parts = unicodedata.normalize("NFD", letter)
    base, marks = parts[0], parts[1:]
    if base.isascii() and base.isalpha() and marks in _ACCENTS:
        return rf"\{_ACCENTS[marks]}{{{base}}}"
    return f"[U+{ord(letter):04X}]"


def latex_text(table: ManuscriptTable) -> str:
    """A whole document with one table, its caption above and its footnotes below.

    Parameters
    ----------
    table : ManuscriptTable
        Goes on over as many pages as it needs, its head on each; landscape where it is wide.
    """
    set_out = layout(table)
    width, height = set_out.page_mm
    paper = f"paperwidth={width:.0f}mm,paperheight={height:.0f}mm,margin={MARGIN_MM:g}mm"
    lines = [
        _PREAMBLE + rf"\usepackage[{paper}]{{geometry}}",
        r"\begin{document}",
        r"% " + 70 * "-",
        rf"\setcounter{{table}}{{{int(table.number.lstrip('S')) - 1}}}",
        *([r"\renewcommand{\thetable}{S\arabic{table}}"] if table.number.startswith("S") else []),
        r"\begingroup",
        rf"\fontsize{{{set_out.size_pt:g}}}{{{1.2 * set_out.size_pt:g}}}\selectfont",
        rf"\setlength{{\tabcolsep}}{{{PADDING_MM:g}mm}}\renewcommand{{\arraystretch}}{{1.1}}",
        r"\setlength{\LTleft}{0pt}\setlength{\LTright}{\fill}\setlength{\LTcapwidth}{\textwidth}",
        _longtable(table, set_out),
        rf"\fontsize{{{set_out.size_pt - 1:g}}}{{{1.2 * (set_out.size_pt - 1):g}}}\selectfont",
        r"\setlength{\parindent}{0pt}\setlength{\parskip}{2pt}",
        *(rf"\noindent {_runs(text)}\par" for text in table.paragraphs()),
        r"\par\endgroup",
        r"% " + 70 * "-",
        r"\end{document}",
    ]
    return "\n".join(lines) + "\n"


def _longtable(table: ManuscriptTable, set_out: Layout) -> str:
    kinds = "".join(
        _kind(column, width, wraps)
        for column, width, wraps in zip(table.columns, set_out.widths_mm, set_out.wraps, strict=True)
    )
    names = _heads(table.columns, [column.head if column.unit else () for column in table.columns])
    units = _heads(table.columns, [_unit(column) or column.head for column in table.columns])
    rows = []
    for group in table.groups:
        if group.head:
            head = escaped(group.head)
            rows += [
                rf"\addlinespace\multicolumn{{{len(table.columns)}}}{{@{{}}l@{{}}}}{{\textbf{{{head}}}}} \\*"
            ]
        rows += [_row(row, set_out.wraps) for row in group.rows]
    top = [r"\toprule", names, units, r"\midrule"]
    return "\n".join(
        [
            rf"\begin{{longtable}}{{@{{}}{kinds}@{{}}}}",
            rf"\caption{{{_runs(table.title)}}}\\",
            *top, r"\endfirsthead",
            *top, r"\endhead",
            r"\bottomrule", r"\endfoot",
            *rows,
            r"\end{longtable}",
        ]
    )  # fmt: skip


def _kind(column: Column, width: float, wraps: bool) -> str:
    if wraps:
        return rf">{{\raggedright\arraybackslash}}p{{{width - 2 * PADDING_MM:.1f}mm}}"
    return "r" if column.numeric else "l"


def _unit(column: Column) -> Words:
    return (Run("("), *column.unit, Run(")")) if column.unit else ()


def _heads(columns: Sequence[Column], texts: Sequence[Words]) -> str:
    """A line of heads, each to the side of its column."""
    last = len(columns) - 1
    fields = []
    for place, (column, text) in enumerate(zip(columns, texts, strict=True)):
        left, right = "@{}" if place == 0 else "", "@{}" if place == last else ""
        side = f"{left}{'r' if column.numeric else 'l'}{right}"
        fields.append(rf"\multicolumn{{1}}{{{side}}}{{{_runs(text)}}}" if text else "")
    return " & ".join(fields) + r" \\"


def _row(row: Sequence[Cell], wraps: Sequence[bool]) -> str:
    fields = (escaped(cell.text, breaks=long) for cell, long in zip(row, wraps, strict=True))
    return " & ".join(fields) + r" \\"


def _runs(runs: Words) -> str:
    return "".join(_FACES[run.face].format(escaped(run.text)) for run in runs)
