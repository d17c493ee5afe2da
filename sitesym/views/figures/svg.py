"""Elements of SVG as text. Every attribute and every piece of text is escaped here and nowhere else."""

from __future__ import annotations

from xml.sax.saxutils import escape, quoteattr

from sitesym.views.labels import printable

PAPER = "var(--paper,#fff)"
"""The page's background; white where the picture stands alone."""

ACCENT = "var(--accent,#1f6f78)"
"""The one colour of emphasis."""

INK = "currentColor"


def element(name: str, *children: str, **attributes: str | float) -> str:
    """One element. `children` are elements already; underscores in attribute names become hyphens (`class_`: class)."""
    written = "".join(f" {_name(key)}={_quoted(value)}" for key, value in attributes.items())
    inner = "".join(children)
    return f"<{name}{written}>{inner}</{name}>" if inner else f"<{name}{written}/>"


def words(text: str) -> str:
    """Text to stand inside an element."""
    return escape(printable(text))


def text(content: str, x: float, y: float, **attributes: str | float) -> str:
    """A line of text at a point."""
    return element("text", words(content), x=x, y=y, **attributes)


def line(x1: float, y1: float, x2: float, y2: float, **attributes: str | float) -> str:
    """A straight stroke in ink."""
    return element("line", x1=x1, y1=y1, x2=x2, y2=y2, stroke=INK, **attributes)


def path(points: list[tuple[float, float]]) -> str:
    """The `d` of a line through points."""
    return "M" + " L".join(f"{number(x)},{number(y)}" for x, y in points)


def number(value: float) -> str:
    """A length with at most one decimal: `3`, `2.5`."""
    return f"{round(value, 1):g}" if abs(value) < 1e5 else f"{value:.0f}"


def drawing(name: str, title: str, description: str, box: tuple[float, float, float, float], *children: str) -> str:
    """A whole picture: `name` makes its ids unique, title and description are for those who cannot see it."""
    left, top, width, height = box
    return element(
        "svg",
        element("title", words(title), id=f"{name}-title"),
        element("desc", words(description), id=f"{name}-description"),
        *children,
        xmlns="http://www.w3.org/2000/svg",
        role="img",
        aria_labelledby=f"{name}-title {name}-description",
        viewBox=" ".join(number(value) for value in (left, top, width, height)),
        width=number(width),
        height=number(height),
        class_="drawing",
    )


def _name(key: str) -> str:
    return key.rstrip("_").replace("_", "-")


def _quoted(value: str | float) -> str:
    return quoteattr(printable(value) if isinstance(value, str) else number(value))
