"""The method note that ends every plan: what was computed, how, under which conventions, with citations."""

from __future__ import annotations

from functools import lru_cache
from typing import TYPE_CHECKING

from sitesym.version import __version__
from sitesym.views.labels import TEXT, Style
from sitesym.views.method import Paragraph
from sitesym.views.sentences import factor_group_words, fill, space_group_words

if TYPE_CHECKING:
    from sitesym.experiment.run_sheet import RunSheet

_ORDER = (
    "notation", "tensors", "phonons", "optics", "powder", "infrared", "thin_samples", "air", "laser_safety", "axes",
    "species",
)  # fmt: skip


def plan_paragraphs(sheet: RunSheet, style: Style = TEXT) -> tuple[Paragraph, ...]:
    """The note in order. Numbers in square brackets point into `plan_references()`."""
    made = [("Symmetry and axes", _symmetry(sheet, style))]
    if sheet.raman is not None:
        made += [
            ("Selection rules", _rules(style)),
            ("Choice", _choice(sheet, style)),
            ("Leakage", _leakage(sheet, style)),
        ]
    if sheet.powder:
        made.append(("Powders", _powders(style)))
    if sheet.infrared:
        made.append(("Infrared", _infrared(style)))
    if sheet.benches:
        made.append(("Bench", _bench(style)))
    made.append(("Limits", _limits(style)))
    return tuple(Paragraph(heading, text) for heading, text in made)


def plan_references() -> tuple[str, ...]:
    """The cited publications as plain text, in the order of their numbers, which start at 1."""
    table = _table()
    return tuple(table[key]["text"] for key in _ORDER)


@lru_cache(maxsize=1)
def _table() -> dict[str, dict[str, str]]:
    import tomllib
    from importlib.resources import files

    return tomllib.loads(files("sitesym.data").joinpath("plan_references.toml").read_text(encoding="utf-8"))


def _cite(*keys: str) -> str:
    return "[" + ", ".join(str(_ORDER.index(key) + 1) for key in keys) + "]"


def _symmetry(sheet: RunSheet, style: Style) -> str:
    analysis = sheet.analysis
    return fill(
        style,
        "Space group {group}, found at a tolerance of {tolerance} Å; factor group {factor}. Cartesian axes {frame}: "
        "{axes}. Species after Mulliken {species}. [uvw] are lattice directions, (hkl) faces; a direction (hkl) is the "
        "normal of that face.",
        group=space_group_words(analysis, style),
        tolerance=f"{analysis.symmetry.tolerance:g}",
        factor=factor_group_words(analysis, style),
        frame=_cite("axes"),
        axes=style.plain(analysis.axes),
        species=_cite("species"),
    )


def _rules(style: Style) -> str:
    return fill(
        style,
        "Geometries ki(ei es)ks {notation}: directions in which light travels inside the crystal, in brackets the "
        "polarizations of laser and scattered light; whichever side of a face the light enters is written alike. An "
        "intensity is the square of es* · T · ei, added up over the components of a species {tensors}. The wavevector "
        "of the phonon is ki − ks. A polar mode is LO where its dipole lies along it, TO where across, oblique where "
        "between: an oblique mode mixes species and its wavenumber moves with the direction {phonons}. Letters of LO "
        "modes differ in value from those of TO modes, because their electric field scatters too.",
        notation=_cite("notation"),
        tensors=_cite("tensors"),
        phonons=_cite("phonons"),
    )


def _choice(sheet: RunSheet, style: Style) -> str:
    plan = sheet.raman
    assert plan is not None
    whence = "the faces and mounts stated" if plan.faces else "the geometries named"
    thick = (
        ""
        if sheet.sample.kind in ("flake", "film") or not plan.faces
        else " Polarizations that birefringence would turn {optics} were not offered."
    )
    return fill(
        style,
        f"Of all measurements that {whence} allow ({len(plan.candidates)} here) the fewest were chosen that show every "
        "Raman-active species, show both LO and TO of polar ones where the faces allow it, and contain for every two "
        "of these a measurement that shows one and not the other; species are told apart also in case LO and TO "
        "coincide. The search is exhaustive; of equal choices the one with fewer faces and easier settings was taken."
        f"{thick}",
        optics=_cite("optics"),
    )


def _leakage(sheet: RunSheet, style: Style) -> str:
    plan = sheet.raman
    assert plan is not None
    setup = plan.conditions
    cone = (
        f" and over the cones of an objective of numerical aperture {setup.aperture:g} in a crystal of index "
        f"{setup.index:g}"
        if setup.aperture
        else ""
    )
    return style.plain(
        f"Leakage was averaged over misorientations of {setup.tilt:g}° in all directions{cone}, relative to the "
        "strongest signal of the species along the axes, for tensor elements of equal size: an order of magnitude. "
        "Light at normal incidence is not refracted; light that enters at an angle is, and directions here are those "
        "inside."
    )


def _powders(style: Style) -> str:
    return fill(
        style,
        "Depolarization ratios are limits over all values of the letters, from the rotational invariants of the "
        "tensors {powder}, for linearly polarized light scattered once.",
        powder=_cite("powder"),
    )


def _infrared(style: Style) -> str:
    return fill(
        style,
        "A mode absorbs in proportion to the square of the part of its dipole along the electric vector {infrared}; "
        "LO features of thin tilted samples after Berreman {thin}.",
        infrared=_cite("infrared"),
        thin=_cite("thin_samples"),
    )


def _bench(style: Style) -> str:
    return fill(
        style,
        "Shifts are differences of wavenumbers in vacuum; wavelengths in air by the index of Ciddor {air}. Anti-Stokes "
        "ratios {powder} hold in thermal equilibrium away from resonance: for counted photons the cube of the ratio of "
        "wavenumbers times the Boltzmann factor, for power the fourth power.",
        air=_cite("air"),
        powder=_cite("powder"),
    )


def _limits(style: Style) -> str:
    return fill(
        style,
        "Symmetry says what is allowed at first order in an ideal crystal, not how strong it is: an allowed band may "
        "be too weak to see. Stress, twins, domains and defects relax these rules. Cautions are flags to check, never "
        "a clearance; laser classes by {safety}. Computed with sitesym {version}.",
        safety=_cite("laser_safety"),
        version=style.plain(__version__),
    )
