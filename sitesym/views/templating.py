"""Templates of the HTML pages: where they are, what escapes, which filters set symbols."""

from __future__ import annotations

from collections.abc import Callable
from functools import lru_cache
from typing import TYPE_CHECKING, Any

from sitesym.views.labels import HTML, decomposition, printable

if TYPE_CHECKING:
    from jinja2 import Environment


@lru_cache(maxsize=1)
def environment() -> Environment:
    """The templates with their filters; everything is escaped that no filter or `ready` marks as HTML."""
    from jinja2 import Environment, PackageLoader, StrictUndefined

    environment = Environment(
        loader=PackageLoader("sitesym.views", "templates"),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        finalize=_harmless,
    )
    environment.filters.update({
        "species": _safe(HTML.species), "symbol": _safe(HTML.symbol), "schoenflies": _safe(HTML.schoenflies),
        "formula": _safe(HTML.formula), "decomposition": _safe(lambda counts: decomposition(counts, HTML)),
        "drawn": _safe(lambda svg: svg),
    })  # fmt: skip
    return environment


def _harmless(value: Any) -> Any:
    """Text from strangers without signs that steer or turn the writing; the templates escape it besides."""
    from markupsafe import Markup

    return printable(value) if isinstance(value, str) and not isinstance(value, Markup) else value


def _safe(maker: Callable[[Any], str]) -> Callable[[Any], str]:
    """The maker's text, which is HTML and safe already."""

    def marked(value: Any) -> str:
        from markupsafe import Markup

        return Markup(maker(value))

    return marked


def ready(text: str) -> str:
    """Text that `sentences` or `method` has set in the style HTML."""
    from markupsafe import Markup

    return Markup(text)
