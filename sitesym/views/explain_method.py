"""The method note that ends every explanation: what was compared with what, by which rules, with citations."""

from __future__ import annotations

from collections.abc import Sequence
from functools import lru_cache
from typing import TYPE_CHECKING

from sitesym.version import __version__
from sitesym.views.labels import TEXT, Style
from sitesym.views.method import Paragraph
from sitesym.views.sentences import factor_group_words, fill, space_group_words

if TYPE_CHECKING:
    from sitesym.bands.explanation import Explanation
    from sitesym.bands.reading import Record

_ORDER = (
    "factor_group", "site_group", "correlation_field", "wavenumbers", "matching", "levels", "two_phonons", "resonance",
    "longitudinal", "notation", "baseline", "profile", "criterion",
)  # fmt: skip
_OF_SPECTRA = ("baseline", "profile", "criterion")


def explain_paragraphs(
    explanation: Explanation, records: Sequence[Record] = (), style: Style = TEXT
) -> tuple[Paragraph, ...]:
    """The note in order. Numbers in square brackets point into `explain_references(records)`."""
    made = [
        ("Symmetry", _symmetry(explanation, style)),
        ("Assignment", _assignment(style)),
        ("Reasons", _reasons(style)),
        ("Lower symmetry and coincidences", _lowering(style)),
    ]
    if any(record.picks is not None for record in records):
        made.append(("Spectra", _spectra(style)))
    made.append(("Limits", _limits(style)))
    return tuple(Paragraph(heading, text) for heading, text in made)


def explain_references(records: Sequence[Record] = ()) -> tuple[str, ...]:
    """The cited publications as plain text, in the order of their numbers, which start at 1."""
    table = _table()
    with_spectra = any(record.picks is not None for record in records)
    return tuple(table[key]["text"] for key in _ORDER if with_spectra or key not in _OF_SPECTRA)


@lru_cache(maxsize=1)
def _table() -> dict[str, dict[str, str]]:
    import tomllib
    from importlib.resources import files

    return tomllib.loads(files("sitesym.data").joinpath("explain_references.toml").read_text(encoding="utf-8"))


def _cite(*keys: str) -> str:
    return "[" + ", ".join(str(_ORDER.index(key) + 1) for key in keys) + "]"


def _symmetry(explanation: Explanation, style: Style) -> str:
    analysis = explanation.analysis
    return fill(
        style,
        "Space group {group}, factor group {factor}. The vibrations of each free unit were followed through its site "
        "group into the factor group {correlation} by the actual operations of the crystal; species after Mulliken "
        "{notation}, pairs of complex-conjugate ones joined. Wavenumbers of free units are tabulated ones {values} or "
        "the user's; symmetry fixes none.",
        group=space_group_words(analysis, style),
        factor=factor_group_words(analysis, style),
        correlation=_cite("factor_group", "site_group", "correlation_field"),
        notation=_cite("notation"),
        values=_cite("wavenumbers"),
    )


def _assignment(style: Style) -> str:
    return fill(
        style,
        "Bands were put to families of components by the assignment of least total cost {matching}: a family takes no "
        "more bands than symmetry allows it in the technique; a band costs more the farther it lies from the expected "
        "wavenumber and where the free unit forbids what the crystal allows; leaving a band without a place has a "
        "fixed cost. These costs are common practice, not physics. External modes and modes of nets are placed by "
        "number alone.",
        matching=_cite("matching"),
    )


def _reasons(style: Style) -> str:
    return fill(
        style,
        "Reasons were tried for each band and ranked by how well their arithmetic fits and how common the cause is; "
        "the rank is no probability. Overtones, sums and differences of observed fundamentals are allowed where the "
        "symmetrised power or product of their species contains one that the technique shows at the zone centre "
        "{levels}; two-phonon continua away from it {continua} were not counted. Fermi resonance {resonance} asks for "
        "a level of the same species close by. Longitudinal companions were sought above transverse modes of polar "
        "species {longitudinal}. Isotopologues lie between no shift and that of the atom moving alone. Lines of "
        "instrument, room and substrates are those of the tables of sitesym.",
        levels=_cite("levels"),
        continua=_cite("two_phonons"),
        resonance=_cite("resonance"),
        longitudinal=_cite("longitudinal"),
    )


def _lowering(style: Style) -> str:
    return style.plain(
        "Every subgroup of the factor group, up to conjugacy, was tried by its operations with the same bands; a lower "
        "symmetry always allows more, so the highest that leave the fewest bands without a place are listed. The "
        "chance of accidental coincidence supposes bands scattered evenly within the range of each family (Poisson)."
    )


def _spectra(style: Style) -> str:
    return fill(
        style,
        "Under spectra a background was found by asymmetric least squares {baseline}; bands were sought with a matched "
        "filter and fitted with pseudo-Voigt profiles {profile}, doubtful ones kept where Schwarz's criterion "
        "{criterion} asks for them. The uncertainty of a picked band joins that of the fit and that of the scale.",
        baseline=_cite("baseline"),
        profile=_cite("profile"),
        criterion=_cite("criterion"),
    )


def _limits(style: Style) -> str:
    return style.plain(
        "Symmetry says what is allowed at first order in an ideal crystal, not how strong it is, and it forbids "
        "nothing that strain, defects, surfaces or an applied field may bring about. A reason that is allowed is not "
        f"thereby proved: the tests beside the arguments decide. Computed with sitesym {__version__}."
    )
