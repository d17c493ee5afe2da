"""Typesetting of symbols and foreign text: Mulliken's species, point and space groups, formulas, names from files.

Results carry plain ASCII (`A1g`, `E'`, `Sigma_g+`, `P4_2/mnm`, `-3m`). A `Style` turns them into what one kind of
document needs, and makes text from strangers' files harmless there.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Callable, Mapping
from dataclasses import dataclass

_SPECIES = re.compile(r"(Sigma|Pi|Delta|Phi|Gamma|[A-Z])(\d*)_?([gu]?)([+-]?)('{0,2})")
_GREEK = {"Sigma": "Σ", "Pi": "Π", "Delta": "Δ", "Phi": "Φ", "Gamma": "Γ"}
_PRIMES = {"": "", "'": "′", "''": "″"}
_SIGNS = {"": "", "+": "⁺", "-": "⁻"}
_SUBSCRIPTS = str.maketrans("0123456789", "₀₁₂₃₄₅₆₇₈₉")
_SYMBOL = re.compile(
    r"-([12]\d|\d)|_(\d)|(.)", re.DOTALL
)  # an axis of order 10 or more (-10m2), or of one digit (-42m)
_SCHOENFLIES = re.compile(r"([A-Z])(.*)", re.DOTALL)
_AMOUNT = re.compile(r"(?<=[A-Za-z)])(\d+(?:\.\d+)?)")
_BAR = "\u0304"
_HIDDEN = {"Cc", "Cf", "Cs", "Co", "Zl", "Zp"}


def printable(text: str) -> str:
    """The text with everything that steers a terminal, turns the writing direction or is no character replaced."""
    one_line = re.sub(r"[\t\r\n\f\v]+", " ", text)
    return "".join("\N{REPLACEMENT CHARACTER}" if unicodedata.category(one) in _HIDDEN else one for one in one_line)


def characters(text: str) -> str:
    """The text with bytes of a file name that are no text replaced: strict readers refuse lone surrogates."""
    return text.encode("utf-8", "surrogateescape").decode("utf-8", "replace")


def _parts(label: str) -> tuple[str, str, str, str, str]:
    matched = _SPECIES.fullmatch(label)
    if matched is None:
        raise ValueError(f"'{label}' is no symbol of a species.")
    letter, digits, parity, sign, primes = matched.groups()
    return letter, digits, parity, sign, primes


def text(label: str) -> str:
    """A species in Unicode: `A₁g`, `E′`, `Σg⁺`. Raises ValueError for what is no Mulliken symbol."""
    letter, digits, parity, sign, primes = _parts(label)
    return f"{_GREEK.get(letter, letter)}{digits.translate(_SUBSCRIPTS)}{parity}{_SIGNS[sign]}{_PRIMES[primes]}"


def html(label: str) -> str:
    """A species in HTML: `A<sub>1g</sub>`, `E′`, `Σ<sub>g</sub><sup>+</sup>`; safe to insert as it is."""
    letter, digits, parity, sign, primes = _parts(label)
    low = f"<sub>{digits}{parity}</sub>" if digits or parity else ""
    high = f"<sup>{sign.replace('-', '−')}</sup>" if sign else ""
    return f"{_GREEK.get(letter, letter)}{low}{high}{_PRIMES[primes]}"


def latex(label: str) -> str:
    """A species in LaTeX mathematics, dollar signs included: `$A_{1g}$`, `$E'$`."""
    letter, digits, parity, sign, primes = _parts(label)
    low = f"_{{{digits}{parity}}}" if digits or parity else ""
    return f"${_latex_letter(letter)}{low}{f'^{sign}' if sign else primes}$"


def _latex_letter(letter: str) -> str:
    return f"\\{letter}" if letter in _GREEK else letter


def _symbol(symbol: str, bar: Callable[[str], str], low: Callable[[str], str], other: Callable[[str], str]) -> str:
    return _SYMBOL.sub(
        lambda found: bar(found[1]) if found[1] else low(found[2]) if found[2] else other(found[3]), symbol
    )


def space_group_text(symbol: str) -> str:
    """A Hermann-Mauguin symbol, of a space group or a point group, in Unicode: `P4₂/mnm`, `R3̄c`, `.3̄m`."""
    return _symbol(symbol, _barred, lambda digit: digit.translate(_SUBSCRIPTS), printable)


def _barred(digits: str) -> str:
    return "".join(digit + _BAR for digit in digits)


def space_group_html(symbol: str) -> str:
    """The same in HTML; safe to insert as it is."""
    return _symbol(
        symbol,
        lambda digits: f'<span style="text-decoration:overline">{digits}</span>',
        lambda digit: f"<sub>{digit}</sub>",
        html_text,
    )


def space_group_latex(symbol: str) -> str:
    """The same in LaTeX mathematics, dollar signs included; letters are italic as International Tables print them."""
    inner = _symbol(
        symbol, lambda digits: f"\\bar{{{digits}}}", lambda digit: f"_{digit}",
        lambda one: {"∞": "\\infty ", " ": "\\,"}.get(one, one if one.isalnum() or one in "/." else latex_text(one)),
    )  # fmt: skip
    return f"${inner}$"


def schoenflies_text(symbol: str) -> str:
    """A Schoenflies symbol in Unicode: `D₃d`, `C∞v`."""
    return symbol.translate(_SUBSCRIPTS)


def schoenflies_html(symbol: str) -> str:
    """`D<sub>3d</sub>`; safe to insert as it is."""
    letter, low = _schoenflies_parts(symbol)
    return f"{letter}<sub>{low}</sub>" if low else letter


def schoenflies_latex(symbol: str) -> str:
    """`$D_{3d}$`, dollar signs included."""
    letter, low = _schoenflies_parts(symbol)
    return f"${letter}_{{{low}}}$".replace("∞", "\\infty ") if low else f"${letter}$"


def _schoenflies_parts(symbol: str) -> tuple[str, str]:
    matched = _SCHOENFLIES.fullmatch(symbol)
    if matched is None:
        raise ValueError(f"'{symbol}' is no Schoenflies symbol.")
    return matched[1], matched[2]


def formula_text(formula: str) -> str:
    """A formula with subscript amounts (`CCaO₃`); with decimal amounts it stays in line (`Ca0.9Mg0.1O`)."""
    if "." in formula:
        return printable(formula)
    return _AMOUNT.sub(lambda found: found[1].translate(_SUBSCRIPTS), printable(formula))


def formula_html(formula: str) -> str:
    """A formula with amounts as subscripts; safe to insert as it is."""
    return _AMOUNT.sub(r"<sub>\1</sub>", html_text(formula))


def formula_latex(formula: str) -> str:
    """A formula with amounts as subscripts."""
    return _AMOUNT.sub(r"$_{\1}$", latex_text(formula))


def html_text(foreign: str) -> str:
    """Any text made harmless for HTML, in elements and in quoted attributes."""
    from html import escape

    return escape(printable(foreign), quote=True)


_ENTITIES = {"<": "&lt;", ">": "&gt;", "&": "&amp;"}


def markdown_text(foreign: str) -> str:
    """Any text made harmless inside a line of Markdown: no markup, no HTML, no column break."""
    escaped = re.sub(r"([\\`*_\[\]|~$])", r"\\\1", printable(foreign))
    return "".join(_ENTITIES.get(one, one) for one in escaped)


_LATEX = {
    "\\": "\\textbackslash{}", "{": "\\{", "}": "\\}", "[": "{[}", "]": "{]}", "*": "{*}", "|": "\\textbar{}",
    "$": "\\$", "&": "\\&", "#": "\\#", "%": "\\%", "_": "\\_", "^": "\\textasciicircum{}", "`": "\\`{}",
    "~": "\\textasciitilde{}", "<": "\\textless{}", ">": "\\textgreater{}", '"': "\'\'", "∥": "$\\parallel$",
    "⟂": "$\\perp$", "−": "$-$", "×": "$\\times$", "·": "$\\cdot$", "√": "$\\surd$", "∞": "$\\infty$", "′": "$\'$",
    "″": "$\'\'$", "Γ": "$\\Gamma$", "–": "--", "—": "---", "…": "\\ldots{}", "°": "$^\\circ$", "ß": "\\ss{}",
    "ø": "\\o{}", "Ø": "\\O{}", "æ": "\\ae{}", "Æ": "\\AE{}", "ł": "\\l{}", "Ł": "\\L{}",
}  # fmt: skip
_ACCENTS = {
    "\u0300": "`", "\u0301": "'", "\u0302": "^", "\u0303": "~", "\u0304": "=", "\u0306": "u", "\u0308": '"',
    "\u030a": "r", "\u030b": "H", "\u030c": "v", "\u0327": "c", "\u0328": "k",
}  # fmt: skip
_GREEK_NAME = re.compile(
    r"GREEK SMALL LETTER (ALPHA|BETA|GAMMA|DELTA|EPSILON|ZETA|ETA|THETA|IOTA|KAPPA|MU|NU|XI|PI|RHO|SIGMA|TAU|UPSILON"
    r"|PHI|CHI|PSI|OMEGA)"
)
_CLUSTER = re.compile(r".[\u0300-\u036f]*", re.DOTALL)


def latex_text(foreign: str) -> str:
    """Any text for LaTeX with every engine: specials escaped, accents as commands, other signs by their code point."""
    return "".join(_latex_cluster(one) for one in _CLUSTER.findall(unicodedata.normalize("NFD", printable(foreign))))


def _latex_cluster(cluster: str) -> str:
    base, marks = _latex_character(cluster[0]), cluster[1:]
    for mark in marks:
        base = f"\\{_ACCENTS[mark]}{{{base}}}" if mark in _ACCENTS else f"{base}(U+{ord(mark):04X})"
    return base


def _latex_character(one: str) -> str:
    if one in _LATEX:
        return _LATEX[one]
    if one.isascii():
        return one
    if unicodedata.decomposition(one).startswith("<sub>"):
        return f"$_{{{unicodedata.normalize('NFKD', one)}}}$"
    if unicodedata.decomposition(one).startswith("<super>"):
        return f"$^{{{unicodedata.normalize('NFKD', one).replace('−', '-')}}}$"
    greek = _GREEK_NAME.fullmatch(unicodedata.name(one, ""))
    return f"$\\{greek[1].lower()}$" if greek else f"(U+{ord(one):04X})"


@dataclass(frozen=True, slots=True)
class Style:
    """How one kind of document sets species, Hermann-Mauguin and Schoenflies symbols, formulas and plain text."""

    species: Callable[[str], str]
    symbol: Callable[[str], str]
    schoenflies: Callable[[str], str]
    formula: Callable[[str], str]
    plain: Callable[[str], str]


TEXT = Style(text, space_group_text, schoenflies_text, formula_text, printable)
HTML = Style(html, space_group_html, schoenflies_html, formula_html, html_text)
LATEX = Style(latex, space_group_latex, schoenflies_latex, formula_latex, latex_text)
MARKDOWN = Style(
    text, space_group_text, schoenflies_text, lambda formula: markdown_text(formula_text(formula)), markdown_text
)


def decomposition(counts: Mapping[str, int], style: Style = TEXT) -> str:
    """A sum of species, `A₁g + 3A₂g`; those with zero left out, `none` for an empty sum."""
    terms = [f"{count if count > 1 else ''}{style.species(label)}" for label, count in counts.items() if count]
    return " + ".join(terms) if terms else "none"
