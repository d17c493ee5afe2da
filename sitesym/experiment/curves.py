"""Angle-resolved Raman curves: parallel and crossed intensity while the sample is turned about the beam.

Light falls straight on a face. Its polarization e encloses the angle θ with a reference direction in the face, counted
anticlockwise as seen when looking at the face; the analyser stands parallel to it or across it. Turning the sample
clockwise by θ does the same. Intensities are |e_s · T · e_i|², added up over the modes of one kind (Loudon, Adv. Phys.
13, 423, 1964), in the square of the unit of the tensor letters. Letters are complex where the crystal absorbs (for an
example Ribeiro et al., ACS Nano 9, 4270, 2015).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from sitesym.analysis import Analysis, SpeciesRow
from sitesym.errors import UsageError
from sitesym.experiment.candidates import axes_of_face, named
from sitesym.experiment.expressions import of_angle
from sitesym.experiment.optics import optical_activity, principal_directions
from sitesym.experiment.phonons import LONGITUDINAL, OBLIQUE, branches
from sitesym.experiment.shown import raman_rows
from sitesym.geometry.directions import Direction, face_normal, in_plane, turned
from sitesym.geometry.notation import Geometry, linear
from sitesym.groups.operation import Floats

Complexes = np.typing.NDArray[np.complex128]
CURVE_MOUNTS = ("backscattering", "forward")
_RATIO = 0.6
"""Default letters of a species are 1, 0.6, 0.36, …: unequal, so that no curve looks simpler than its species is."""
_ZERO = 1e-9


@dataclass(frozen=True, eq=False)
class FaceAxes:
    """A face and the two directions in it that curves refer to.

    normal     points out of the crystal.
    reference  where θ is zero; across, where θ is 90°, is normal × reference.
    """

    face: str
    normal: Direction
    reference: Direction
    across: Direction


@dataclass(frozen=True, eq=False)
class FaceTensors:
    """One kind of phonon of a species, seen through a face.

    elements  (m, 3, k) for m modes, elements uu, vv, uv in the face (u reference, v across) and k letters.
    """

    label: str
    phonon: str | None
    letters: tuple[str, ...]
    elements: Floats

    @property
    def name(self) -> str:
        """`E(LO)`, `A1g`."""
        return f"{self.label}({self.phonon})" if self.phonon else self.label

    @property
    def allowed(self) -> bool:
        """Whether the face shows it at any angle."""
        return bool(np.abs(self.elements).max(initial=0.0) > _ZERO)

    def intensities(self, degrees: Floats, values: Complexes | Floats) -> tuple[Floats, Floats]:
        """Parallel and crossed intensity, each (n,), at the angles θ (n,) for values (k,) of the letters."""
        tensors = self.elements @ values
        angle = np.radians(degrees)
        parallel, crossed = tensors @ parallel_weights(angle).T, tensors @ crossed_weights(angle).T
        return np.sum(np.abs(parallel) ** 2, axis=0), np.sum(np.abs(crossed) ** 2, axis=0)


def parallel_weights(angle: Floats) -> Floats:
    """(n, 3) weights of uu, vv, uv in e · T · e at angles (n,) in radians."""
    return np.stack([np.cos(angle) ** 2, np.sin(angle) ** 2, np.sin(2 * angle)], axis=-1)


def crossed_weights(angle: Floats) -> Floats:
    """(n, 3) weights of uu, vv, uv in e′ · T · e, with e′ 90° further on than e."""
    half = np.sin(2 * angle) / 2
    return np.stack([-half, half, np.cos(2 * angle)], axis=-1)


@dataclass(frozen=True, eq=False)
class AngleCurve:
    """The two curves of one kind of phonon on one face.

    phonon                "LO", "TO", "oblique", or None for species that are not polar and in forward scattering.
    values                (k,) complex, of the letters; those in `assumed` were not given and are mere examples.
    degrees               (n,) angle θ from the reference towards `axes.across`; parallel and crossed are (n,).
    parallel_expression   the same in letters and θ, exact for any letters; "0" where nothing is allowed.
    """

    label: str
    phonon: str | None
    axes: FaceAxes
    mount: str
    letters: tuple[str, ...]
    values: Complexes
    assumed: tuple[str, ...]
    degrees: Floats
    parallel: Floats
    crossed: Floats
    parallel_expression: str
    crossed_expression: str

    @property
    def name(self) -> str:
        """`E(LO)`, `A1g`."""
        return f"{self.label}({self.phonon})" if self.phonon else self.label

    @property
    def allowed(self) -> bool:
        """Whether symmetry lets the face show it at any angle."""
        return (self.parallel_expression, self.crossed_expression) != ("0", "0")

    def __repr__(self) -> str:
        return f"AngleCurve({self.name} on {self.axes.face}: {self.parallel_expression}; {self.crossed_expression})"


def angle_curves(
    analysis: Analysis,
    face: str,
    *,
    reference: Direction | None = None,
    letters: Mapping[str, complex] | None = None,
    step: float = 2.0,
    mount: str = "backscattering",
) -> tuple[AngleCurve, ...]:
    """Curves of every Raman-active species with optic modes, one for each kind of its phonons.

    face       indices such as "001" or "10-10". reference: direction where θ is zero; the first simple one in the face
               if none is given, else its projection on the face.
    letters    values of tensor letters as the report prints them; those left out are 1, 0.6, 0.36, … in each species.
    step       degrees between points, from 0 to 360.
    mount      "backscattering", or "forward" for light that goes through.

    Raises UsageError for a face, direction, letter, step or mount that cannot be.
    """
    if not 0 < step <= 90:
        raise UsageError(f"A step of {step:g}° is no use.", "Give one above 0 and up to 90 degrees.")
    axes = face_axes(analysis, face, reference)
    given = _checked_letters(analysis, letters or {})
    seen = [one for row in raman_rows(analysis) for one in tensors_on_face(row, axes, mount)]
    degrees = np.linspace(0.0, 360.0, round(360 / step) + 1) if _divides(step) else np.arange(0.0, 360.0, step)
    return tuple(_curve(one, axes, mount, given, degrees) for one in seen)


def _divides(step: float) -> bool:
    return abs(360 / step - round(360 / step)) < 1e-9


def face_axes(analysis: Analysis, face: str, reference: Direction | None = None) -> FaceAxes:
    """The face's normal, the reference direction in it (see `angle_curves`), and normal × reference.

    Raises UsageError for indices that are none, or a reference along the normal.
    """
    lattice = analysis.symmetry.lattice
    normal = face_normal(face, lattice)
    first = in_plane(reference, normal) if reference else axes_of_face(normal, lattice)[0]
    second = np.cross(normal.vector, first.vector)
    line = named(second, lattice)
    if line is None:
        return FaceAxes(face, normal, first, turned(first, normal, 90))
    return FaceAxes(face, normal, first, line if line.vector @ second > 0 else -line)


def tensors_on_face(row: SpeciesRow, axes: FaceAxes, mount: str = "backscattering") -> tuple[FaceTensors, ...]:
    """Every kind of phonon of a species as the face shows it; the wavevector is along the normal in backscattering.

    Raises UsageError for a mount in which light does not go along one line.
    """
    if mount not in CURVE_MOUNTS:
        raise UsageError(
            f"The sample cannot be turned about the beam in '{mount}'.", f"Choose from {', '.join(CURVE_MOUNTS)}."
        )
    u, v = axes.reference.vector, axes.across.vector
    found = []
    for branch in branches(row.tensor, axes.normal.vector if mount == "backscattering" else None):
        bases = np.array(branch.bases)
        elements = np.stack(
            [np.einsum("i,mkij,j->mk", *pair) for pair in ((u, bases, u), (v, bases, v), (u, bases, v))]
        )
        elements = np.where(np.abs(elements) < _ZERO, 0.0, elements)
        found.append(FaceTensors(row.label, branch.kind, row.tensor.letters, elements.transpose(1, 0, 2)))
    return tuple(found)


def _checked_letters(analysis: Analysis, letters: Mapping[str, complex]) -> dict[str, complex]:
    known = [letter for row in analysis.species for letter in row.tensor.letters]
    for letter, value in letters.items():
        if letter not in known:
            raise UsageError(
                f"No Raman tensor of this crystal has a letter '{letter}'.", f"The letters are {', '.join(known)}."
            )
        if not np.isfinite(value):
            raise UsageError(f"The letter {letter} cannot be {value}.", "Give a finite number, real or complex.")
    return {letter: complex(value) for letter, value in letters.items()}


def _curve(seen: FaceTensors, axes: FaceAxes, mount: str, given: Mapping[str, complex], degrees: Floats) -> AngleCurve:
    assumed = tuple(letter for letter in seen.letters if letter not in given)
    values = np.array([given.get(letter, complex(_RATIO**k)) for k, letter in enumerate(seen.letters)])
    parallel, crossed = seen.intensities(degrees, values)
    words = curve_expressions(seen, complex_letters=bool(np.iscomplex(values).any()))
    return AngleCurve(
        seen.label, seen.phonon, axes, mount, seen.letters, values, assumed, degrees, parallel, crossed, *words
    )


def curve_expressions(seen: FaceTensors, *, complex_letters: bool = False) -> tuple[str, str]:
    """Parallel and crossed intensity in letters and θ, in the shortest of several equal forms."""
    uu, vv, uv = seen.elements.transpose(1, 0, 2)
    mean, half = (uu + vv) / 2, (uu - vv) / 2
    powers = (np.stack([uu, vv, uv], axis=1), ("cos²θ", "sin²θ", "sin2θ"))
    doubled = (np.stack([mean, half, uv], axis=1), ("1", "cos2θ", "sin2θ"))
    crossed = (np.stack([-half, uv], axis=1), ("sin2θ", "cos2θ"))
    parallel_words = _shortest((powers, doubled), seen.letters, complex_letters)
    return parallel_words, _shortest((crossed,), seen.letters, complex_letters)


def _shortest(forms: Sequence[tuple[Floats, tuple[str, ...]]], letters: tuple[str, ...], complex_letters: bool) -> str:
    blocks, functions = forms[-1]
    constant = _constant_part(blocks, functions)
    if constant is not None:
        return of_angle(constant, letters, ("1",), complex_letters=complex_letters)
    texts = [of_angle(one, letters, names, complex_letters=complex_letters) for one, names in forms]
    return min(texts, key=len)


def _constant_part(blocks: Floats, functions: tuple[str, ...]) -> Floats | None:
    """Amplitudes (m, 1, k) with the same intensity if that does not depend on the angle, else None."""
    sampled = []
    for angle in np.radians([0.0, 20.0, 45.0, 70.0, 110.0, 155.0]):
        weights = {"1": 1.0, "cos2θ": np.cos(2 * angle), "sin2θ": np.sin(2 * angle)}
        amplitudes = np.einsum("f,mfk->mk", [weights[name] for name in functions], blocks)
        sampled.append(amplitudes.T @ amplitudes)
    forms = np.array(sampled)
    if np.abs(forms - forms[0]).max(initial=0.0) > _ZERO:
        return None
    place = [1.0 if name in ("1", "cos2θ") else 0.0 for name in functions]
    return np.asarray(np.einsum("f,mfk->mk", place, blocks)[:, None, :])


def curve_notes(analysis: Analysis, axes: FaceAxes, mount: str = "backscattering") -> tuple[str, ...]:
    """What may make measured curves differ from the computed ones on this face, in plain sentences."""
    notes = [_birefringence(analysis, axes)]
    beam, back = axes.normal, -axes.normal if mount == "backscattering" else axes.normal
    polarization = linear(axes.reference)
    notes.append(optical_activity(analysis, Geometry(beam, polarization, polarization, back)))
    kinds = {one.phonon for row in raman_rows(analysis) for one in tensors_on_face(row, axes, mount) if one.allowed}
    if LONGITUDINAL in kinds or OBLIQUE in kinds:
        notes.append(
            "longitudinal and oblique phonons scatter through their electric field as well, so their letters differ in "
            "value from those of the transverse ones"
        )
    return tuple(note for note in notes if note)


def _birefringence(analysis: Analysis, axes: FaceAxes) -> str:
    directions = principal_directions(analysis, axes.normal.vector)
    if directions is not None and not len(directions):
        return ""
    where = "directions that symmetry does not fix"
    if directions is not None:
        angles = [
            np.degrees(np.arctan2(one @ axes.across.vector, one @ axes.reference.vector)) % 180 for one in directions
        ]
        where = f"θ = {' and '.join(f'{angle:.0f}°' for angle in sorted(angles))}"
    return (
        f"this face is birefringent: light keeps its polarization only along {where}; elsewhere the curves hold for "
        "scattering near the surface (strong absorption, thin flakes), and complex letters take up part of the rest"
    )
