"""The plan of an experiment: what each geometry shows, the least set of them, and what remains undecided."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace

from sitesym.analysis import Analysis
from sitesym.errors import UsageError
from sitesym.experiment.candidates import Candidate, candidates
from sitesym.experiment.cover import Cover, Demand, demands_of, least_cover, meets, targets_of
from sitesym.experiment.faces import helpful_faces
from sitesym.experiment.leakage import Leak, check_conditions, leaks
from sitesym.experiment.optics import BeamNote, beam_notes, optical_activity
from sitesym.experiment.phonons import LONGITUDINAL, TRANSVERSE
from sitesym.experiment.shown import GeometryResult, raman_rows, what_it_shows
from sitesym.geometry.notation import parse_geometry

_TURNED_AWAY = 0.01
"""Share of the light that birefringence may turn before a measurement is not offered."""

_UNKNOWN_OPTICS = 4
"""Ease is this much worse where the directions of unchanged polarization must be found first."""


@dataclass(frozen=True, eq=False)
class Measurement:
    """One measurement of the plan.

    candidate  faces, mount and geometry; result what it shows.
    purpose    the demands that it meets.
    leaks      of species it forbids; beams and activity what the crystal may do to the polarization.
    """

    candidate: Candidate
    result: GeometryResult
    purpose: tuple[Demand, ...]
    leaks: tuple[Leak, ...]
    beams: tuple[BeamNote, ...]
    activity: str


@dataclass(frozen=True, slots=True)
class FurtherFace:
    """A face that the sample does not have and that would meet further demands in backscattering."""

    face: str
    meets: tuple[Demand, ...]


@dataclass(frozen=True, slots=True)
class Conditions:
    """The conditions to which figures refer: tilt in degrees, numerical aperture, refractive index of the crystal.

    Raises UsageError for values that make no sense.
    """

    tilt: float = 2.0
    aperture: float = 0.0
    index: float = 1.5

    def __post_init__(self) -> None:
        check_conditions(self.tilt, self.aperture, self.index)


@dataclass(frozen=True, eq=False)
class Plan:
    """A plan of polarized Raman measurements on one crystal.

    faces, mounts  what the sample offers; analyser whether the scattered light is analysed.
    asked          geometries that the user named.
    candidates     all measurements that the faces allow, in one order, `results` what they show; without faces those
                   that the user named.
    cover          the least set among the candidates: their indices, demands met and not met.
    measurements   the chosen ones in full.
    further        a face that would help, or None.
    """

    analysis: Analysis
    faces: tuple[str, ...]
    mounts: tuple[str, ...]
    analyser: bool
    asked: tuple[Measurement, ...]
    candidates: tuple[Candidate, ...]
    results: tuple[GeometryResult, ...]
    cover: Cover
    measurements: tuple[Measurement, ...]
    further: FurtherFace | None
    conditions: Conditions

    def __repr__(self) -> str:
        chosen = ", ".join(one.result.geometry.notation for one in self.measurements)
        return f"Plan({self.analysis.formula}: {chosen or 'no measurement'})"

    @property
    def separated(self) -> tuple[tuple[str, str], ...]:
        """Pairs that the plan tells apart: of species in all their phonons, and LO from TO of one species."""
        met, unmet = _pairs(self.cover.met), _pairs(self.cover.unmet)
        left = {_labels(pair) for pair in unmet}
        across = dict.fromkeys(labels for pair in met if len(set(labels := _labels(pair))) == 2 and labels not in left)
        return (*across, *(pair for pair in met if len(set(_labels(pair))) == 1))

    @property
    def inseparable(self) -> tuple[tuple[str, str], ...]:
        """Pairs that no measurement offered tells apart: of species, or of some of their phonons."""
        told = {_labels(pair) for pair in _pairs(self.cover.met)}
        unmet = _pairs(self.cover.unmet)
        return tuple(dict.fromkeys(pair if _labels(pair) in told else _labels(pair) for pair in unmet))

    @property
    def unseen(self) -> tuple[str, ...]:
        """Raman-active species that no measurement offered shows."""
        return tuple(demand.first for demand in self.cover.unmet if not demand.second)

    @property
    def other_phonons(self) -> tuple[str, ...]:
        """LO or TO phonons of seen polar species that no measurement offered shows; not for free dipoles."""
        targets = targets_of(self.results)
        found = []
        for row in raman_rows(self.analysis):
            fixed = len(row.tensor.components) > 1 or len(row.tensor.polar_space) == 1
            if row.activity.infrared and fixed and targets.get(row.label):
                both = (f"{row.label}({LONGITUDINAL})", f"{row.label}({TRANSVERSE})")
                found += [name for name in both if name not in targets[row.label]]
        return tuple(found)


def _pairs(demands: Iterable[Demand]) -> list[tuple[str, str]]:
    return [(demand.first, demand.second) for demand in demands if demand.second]


def _labels(pair: tuple[str, str]) -> tuple[str, str]:
    return pair[0].partition("(")[0], pair[1].partition("(")[0]


def make_plan(
    analysis: Analysis,
    *,
    faces: Sequence[str] = (),
    mounts: Sequence[str] = ("backscattering",),
    analyser: bool = True,
    geometries: Sequence[str] = (),
    conditions: Conditions | None = None,
    thin: bool = False,
) -> Plan:
    """Plan polarized Raman measurements.

    faces       indices of the faces that the sample has, such as "001" or "10-10". Without any, the least plan is made
                of `geometries` alone.
    mounts      "backscattering", "right-angle", "forward".
    geometries  geometries to judge as they stand, in typed notation, such as "z(xy)-z".
    thin        the sample is too thin for birefringence to matter. Otherwise measurements whose polarization it would
                turn are not offered.

    Raises UsageError for faces, mounts or geometries that cannot be, and for crystals without Raman-active modes.
    """
    if not raman_rows(analysis):
        raise UsageError(
            "This crystal has no Raman-active optic mode at the zone centre.",
            "Plan an infrared measurement, or look at `sitesym report`.",
        )
    lattice, setup = analysis.symmetry.lattice, conditions or Conditions()
    named = [Candidate(parse_geometry(text, lattice), (), "as named", 0) for text in geometries]
    offered = [
        one
        for candidate in (candidates(lattice, faces, mounts, analyser=analyser) if faces else named)
        if (one := _usable(analysis, candidate, thin or not faces)) is not None
    ]
    results = tuple(what_it_shows(analysis, one.geometry) for one in offered)
    cover = least_cover(offered, results)
    return Plan(
        analysis,
        tuple(faces),
        tuple(mounts),
        analyser,
        tuple(_measurement(analysis, one, what_it_shows(analysis, one.geometry), cover, setup) for one in named),
        tuple(offered),
        results,
        cover,
        tuple(_measurement(analysis, offered[k], results[k], cover, setup) for k in cover.chosen),
        _further(analysis, results, cover, faces, analyser, thin) if faces else None,
        setup,
    )


def _usable(analysis: Analysis, candidate: Candidate, as_it_is: bool) -> Candidate | None:
    """The candidate, less easy where the crystal's optics are not known; None where it would turn the polarization."""
    if as_it_is:
        return candidate
    notes = beam_notes(analysis, candidate.geometry)
    if any(note.fraction is not None and note.fraction > _TURNED_AWAY for note in notes):
        return None
    return replace(candidate, ease=candidate.ease + _UNKNOWN_OPTICS) if notes else candidate


def _measurement(
    analysis: Analysis, candidate: Candidate, result: GeometryResult, cover: Cover, setup: Conditions
) -> Measurement:
    geometry = candidate.geometry
    return Measurement(
        candidate,
        result,
        tuple(demand for demand in cover.met if meets(result, demand)),
        leaks(analysis, geometry, tilt=setup.tilt, aperture=setup.aperture, index=setup.index),
        beam_notes(analysis, geometry),
        optical_activity(analysis, geometry),
    )


def _further(
    analysis: Analysis,
    results: Sequence[GeometryResult],
    cover: Cover,
    faces: Sequence[str],
    analyser: bool,
    thin: bool,
) -> FurtherFace | None:
    """The first of the helpful faces that, measured as those at hand, meets most of what they leave."""
    best: FurtherFace | None = None
    for face in helpful_faces(analysis, faces):
        tried = candidates(analysis.symmetry.lattice, [face], analyser=analyser)
        offered = (_usable(analysis, one, thin) for one in tried)
        more = [what_it_shows(analysis, one.geometry) for one in offered if one is not None]
        wanted = [demand for demand in demands_of([*results, *more]) if demand not in cover.met]
        met = tuple(demand for demand in wanted if any(meets(result, demand) for result in more))
        if met and (best is None or len(met) > len(best.meets)):
            best = FurtherFace(face, met)
    return best
