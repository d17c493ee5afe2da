"""Polarized infrared spectra on a face: which species the electric vector drives, and whether TO or LO shows.

A mode absorbs in proportion to (e · p)², e the electric vector and p the mode's dipole (Wilson, Decius and Cross 1955,
chapter 3; Decius and Hexter, Molecular Vibrations in Crystals, 1977). At normal incidence the wavevector lies along the
normal: dipoles in the face absorb at their TO wavenumber. At oblique incidence p-polarized light has an electric part
along the normal too, and a thin sample then shows dipoles along the normal at their LO wavenumber (Berreman, Phys. Rev.
130, 2193, 1963). A dipole between the two gives an oblique mode in between.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from sitesym.analysis import Analysis, SpeciesRow
from sitesym.experiment.candidates import axes_of_face
from sitesym.experiment.optics import principal_directions
from sitesym.experiment.phonons import LONGITUDINAL, OBLIQUE, TRANSVERSE
from sitesym.geometry.directions import Direction, face_normal, in_plane
from sitesym.groups.operation import Floats

NORMAL, GRAZING = "normal incidence", "oblique incidence, p-polarized"
_ZERO = 1e-6
_AXIS_OF_PLANE = (("x", (1.0, 0.0, 0.0)), ("y", (0.0, 1.0, 0.0)), ("z", (0.0, 0.0, 1.0)))


@dataclass(frozen=True, slots=True)
class InfraredBand:
    """One kind of phonon of an infrared-active species, for one direction of the electric vector.

    phonon    "TO", "LO" or "oblique" for a wavevector along the normal of the face.
    coupling  (e · p)², from 0 (forbidden) to 1, for dipoles of unit length; where `free`, the most it can be.
    free      symmetry leaves the dipole's direction open in a plane or in space: each mode has its own.
    """

    label: str
    phonon: str
    coupling: float
    free: bool

    @property
    def name(self) -> str:
        """`Eu(TO)`."""
        return f"{self.label}({self.phonon})"

    @property
    def allowed(self) -> bool:
        """Whether symmetry lets it absorb."""
        return self.coupling > _ZERO


@dataclass(frozen=True, eq=False)
class InfraredRow:
    """One direction of the electric vector.

    incidence  "normal incidence", or "oblique incidence, p-polarized" for the part of the electric vector along the
               normal (the part in the face acts as at normal incidence).
    bands      every kind of phonon of every infrared-active species with optic modes, forbidden ones included.
    words      what is to be seen, in a plain sentence.
    """

    direction: Direction
    incidence: str
    bands: tuple[InfraredBand, ...]
    words: str

    @property
    def allowed(self) -> tuple[InfraredBand, ...]:
        """Only what is to be seen."""
        return tuple(band for band in self.bands if band.allowed)

    def __repr__(self) -> str:
        seen = ", ".join(band.name for band in self.allowed) or "nothing"
        return f"InfraredRow({self.direction.name}, {self.incidence}: {seen})"


def infrared_rows(
    analysis: Analysis, face: str, directions: Sequence[Direction] | None = None
) -> tuple[InfraredRow, ...]:
    """What polarized infrared light shows on a face: a row for each direction in it, and one for the normal.

    face        indices such as "001". directions: projected on the face; two perpendicular simple ones if not given.

    Raises UsageError for indices that are none, or a direction along the normal.
    """
    lattice = analysis.symmetry.lattice
    normal = face_normal(face, lattice)
    chosen = axes_of_face(normal, lattice) if directions is None else [in_plane(one, normal) for one in directions]
    electric = [(one, NORMAL) for one in chosen] + [(normal, GRAZING)]
    rows = infrared_species(analysis)
    found = []
    for direction, incidence in electric:
        bands = tuple(band for row in rows for band in _bands(row, direction.vector, normal.vector, incidence))
        found.append(InfraredRow(direction, incidence, bands, _row_words(direction, incidence, bands)))
    return tuple(found)


def infrared_species(analysis: Analysis) -> tuple[SpeciesRow, ...]:
    """Infrared-active species that have optic modes in this crystal."""
    return tuple(row for row in analysis.species if row.activity.infrared and row.optic)


def _bands(row: SpeciesRow, electric: Floats, normal: Floats, incidence: str) -> list[InfraredBand]:
    space = dipole_space(row)
    inside = float(np.sum((space @ electric) ** 2))
    along = space @ normal
    size = float(np.linalg.norm(along))
    free = _is_free(row)
    if len(space) == 1 or free:
        return [InfraredBand(row.label, _kind(size, free), _clean(inside), free)]
    turned = float((along / size) @ (space @ electric)) ** 2 if size > _ZERO else 0.0
    pair = [InfraredBand(row.label, _kind(size, free), _clean(turned), False)] if size > _ZERO else []
    if incidence == NORMAL:
        pair.append(InfraredBand(row.label, TRANSVERSE, _clean(inside - turned), False))
    return pair


def dipole_space(row: SpeciesRow) -> Floats:
    """(m, 3) orthonormal directions along which dipoles of a species may point."""
    polar = [component.polar for component in row.tensor.components if component.polar is not None]
    vectors = np.concatenate([np.array(polar).reshape(-1, 3), row.tensor.polar_space])
    _, sizes, directions = np.linalg.svd(vectors, full_matrices=False)
    return np.asarray(directions[sizes > _ZERO])


def _is_free(row: SpeciesRow) -> bool:
    return len(row.tensor.components) == 1 and len(row.tensor.polar_space) > 1


def _kind(size: float, free: bool) -> str:
    """The mode whose dipole has the part `size` along the wavevector."""
    if size < _ZERO:
        return TRANSVERSE
    return LONGITUDINAL if size > 1 - _ZERO and not free else OBLIQUE


def _clean(value: float) -> float:
    return round(value, 12) + 0.0


def _row_words(direction: Direction, incidence: str, bands: Sequence[InfraredBand]) -> str:
    seen = [band for band in bands if band.allowed]
    if not bands:
        return "this crystal has no infrared-active optic mode"
    if incidence == NORMAL:
        if not seen:
            return f"electric vector along {direction.name}: no species absorbs"
        return f"electric vector along {direction.name}: {_listed(seen)}"
    if not seen:
        return f"no dipole has a part along the normal {direction.name}: oblique incidence adds nothing"
    return (
        f"a thin sample tilted in p-polarized light shows besides, by the electric part along the normal "
        f"{direction.name}: {_listed(seen)}; s-polarized light does not show it"
    )


def _listed(bands: Sequence[InfraredBand]) -> str:
    names = [
        f"{band.name}{' (as far as its dipole points there)' if band.free else ''}"
        if band.coupling > 1 - _ZERO or band.free
        else f"{band.name} with {100 * band.coupling:.0f} % of its strength"
        for band in bands
    ]
    return ", ".join(names)


def infrared_words(analysis: Analysis, face: str) -> tuple[str, ...]:
    """How to measure and read polarized infrared spectra on a face, in plain sentences."""
    rows = infrared_species(analysis)
    if not rows:
        return ("This crystal has no infrared-active optic mode.",)
    normal = face_normal(face, analysis.symmetry.lattice)
    said = [_transmission(), _tilted(rows, normal), _reflectance(), *_free_dipoles(analysis, rows, normal)]
    directions = principal_directions(analysis, normal.vector)
    if directions is None:
        said.append(
            "Symmetry does not fix the directions in which light vibrates unchanged on this face, and in the infrared "
            "they turn with the wavenumber: transmitted or reflected light is not polarized as the incident light was."
        )
    said.append(
        "Powders (pellets, mulls) absorb between TO and LO, by the shape of the grains and the index of the matrix: "
        "strong bands lie above TO. In attenuated total reflection strong bands lie lower and are skewed to lower "
        "wavenumbers against transmission; p-polarized light has an electric part along the normal there too, so that "
        "LO features may show."
    )
    return tuple(said)


def _transmission() -> str:
    return (
        "Transmission at normal incidence shows transverse modes (TO), where the sample is thin enough that strong "
        "bands do not run to zero; a polarizer along each direction separates the species."
    )


def _tilted(rows: Sequence[SpeciesRow], normal: Direction) -> str:
    kinds: dict[str, list[str]] = {LONGITUDINAL: [], OBLIQUE: []}
    for row in rows:
        size = float(np.linalg.norm(dipole_space(row) @ normal.vector))
        if size > _ZERO:
            kinds[_kind(size, _is_free(row))].append(row.label)
    where = {LONGITUDINAL: "near the LO wavenumber", OBLIQUE: "between TO and LO"}
    parts = [f"{', '.join(labels)} {where[kind]}" for kind, labels in kinds.items() if labels]
    if not parts:
        return f"No dipole has a part along the normal {normal.name}: tilting the sample adds nothing."
    return (
        f"Tilted by 30 to 60° in p-polarized light, a thin sample also shows {' and '.join(parts)} (Berreman effect); "
        "the feature goes away in s polarization and at normal incidence, which proves it."
    )


def _reflectance() -> str:
    return (
        "Reflectance of a thick polished face at near-normal incidence is high from about TO to LO; its maximum is "
        "neither. Fit a dielectric function, or use the Kramers-Kronig relation: Im ε peaks at TO, Im(-1/ε) at LO."
    )


def _free_dipoles(analysis: Analysis, rows: Sequence[SpeciesRow], normal: Direction) -> list[str]:
    said = []
    for row in rows:
        if not _is_free(row):
            continue
        space = dipole_space(row)
        if len(space) == 3:
            said.append(
                f"Dipoles of {row.label} may point anywhere in space, each mode its own way: spectra along two "
                "directions do not fix them. Measure at three or more polarization angles on several faces and fit "
                "the whole dielectric tensor (Emslie and Aronson, J. Opt. Soc. Am. 73, 916, 1983)."
            )
            continue
        across = np.cross(space[0], space[1])
        named = [f"across {name}" for name, axis in _AXIS_OF_PLANE if abs(across @ axis) > 1 - _ZERO]
        where = named[0] if named else "of symmetry"
        face = "this face" if abs(across @ normal.vector) > 1 - _ZERO else "the face parallel to that plane"
        said.append(
            f"Dipoles of {row.label} lie in the plane {where}, each mode in its own direction that symmetry leaves "
            f"free: on {face} measure at three or more polarization angles (0, 45, 90°) to find it, and do not expect "
            "maxima along the axes."
        )
    return said
