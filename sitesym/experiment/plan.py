"""The plan of an experiment: what each geometry shows, the least set of them, and what remains undecided."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from sitesym.analysis import Analysis
from sitesym.errors import UsageError
from sitesym.experiment.candidates import Candidate, candidates
from sitesym.experiment.cover import Cover, Demand, demands_of, least_cover, meets
from sitesym.experiment.leakage import Leak, leaks
from sitesym.experiment.optics import BeamNote, beam_notes, optical_activity
from sitesym.experiment.shown import GeometryResult, raman_rows, what_it_shows
from sitesym.geometry.notation import parse_geometry

HELPFUL_FACES = ("001", "100", "010", "110", "1-10", "101", "011", "111", "120", "210")
"""Tried in this order when the faces at hand leave something undecided."""


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
class Bench:
    """The conditions to which figures refer: tilt in degrees, numerical aperture, refractive index of the crystal."""

    tilt: float = 2.0
    aperture: float = 0.0
    index: float = 1.5


@dataclass(frozen=True, eq=False)
class Plan:
    """A plan for one crystal.

    faces, mounts  what the sample offers; analyser whether the scattered light is analysed.
    asked          geometries that the user named, with what they show.
    candidates     all measurements that the faces allow, with what they show, in one order.
    cover          the least set among them: indices of candidates, demands met and not met.
    measurements   the chosen ones in full.
    further        a face that would help, or None.
    """

    analysis: Analysis
    faces: tuple[str, ...]
    mounts: tuple[str, ...]
    analyser: bool
    asked: tuple[GeometryResult, ...]
    candidates: tuple[Candidate, ...]
    results: tuple[GeometryResult, ...]
    cover: Cover
    measurements: tuple[Measurement, ...]
    further: FurtherFace | None
    bench: Bench

    def __repr__(self) -> str:
        chosen = ", ".join(one.result.geometry.notation for one in self.measurements)
        return f"Plan({self.analysis.structure.formula}: {chosen or 'no measurement'})"

    @property
    def separated(self) -> tuple[tuple[str, str], ...]:
        """Pairs of species that the plan tells apart."""
        return tuple((demand.first, demand.second) for demand in self.cover.met if demand.second)

    @property
    def inseparable(self) -> tuple[tuple[str, str], ...]:
        """Pairs that no measurement on these faces tells apart by presence and absence."""
        return tuple((demand.first, demand.second) for demand in self.cover.unmet if demand.second)

    @property
    def unseen(self) -> tuple[str, ...]:
        """Raman-active species that no measurement on these faces shows."""
        return tuple(demand.first for demand in self.cover.unmet if not demand.second)


def make_plan(
    analysis: Analysis,
    *,
    faces: Sequence[str] = (),
    mounts: Sequence[str] = ("backscattering",),
    analyser: bool = True,
    geometries: Sequence[str] = (),
    bench: Bench | None = None,
) -> Plan:
    """Plan polarized Raman measurements.

    faces       indices of the faces that the sample has, such as "001" or "10-10"; none for powders.
    mounts      "backscattering", "right-angle", "forward".
    geometries  geometries to judge as they stand, in typed notation, such as "z(xy)-z".

    Raises UsageError for faces, mounts or geometries that cannot be.
    """
    lattice = analysis.symmetry.lattice
    conditions = bench or Bench()
    if not raman_rows(analysis):
        raise UsageError(
            "This crystal has no Raman-active optic mode at the zone centre.",
            "Plan an infrared measurement, or look at `sitesym report`.",
        )
    asked = tuple(what_it_shows(analysis, parse_geometry(text, lattice)) for text in geometries)
    offered = candidates(lattice, faces, mounts, analyser=analyser) if faces else ()
    results = tuple(what_it_shows(analysis, one.geometry) for one in offered)
    cover = least_cover(offered, results)
    chosen = tuple(_measurement(analysis, offered[k], results[k], cover, conditions) for k in cover.chosen)
    further = _further(analysis, results, cover, faces) if faces else None
    return Plan(
        analysis, tuple(faces), tuple(mounts), analyser, asked, offered, results, cover, chosen, further, conditions
    )


def _measurement(
    analysis: Analysis, candidate: Candidate, result: GeometryResult, cover: Cover, bench: Bench
) -> Measurement:
    geometry = candidate.geometry
    return Measurement(
        candidate,
        result,
        tuple(demand for demand in cover.met if meets(result, demand)),
        leaks(analysis, geometry, tilt=bench.tilt, aperture=bench.aperture, index=bench.index),
        beam_notes(analysis, geometry),
        optical_activity(analysis, geometry),
    )


def _further(
    analysis: Analysis, results: Sequence[GeometryResult], cover: Cover, faces: Sequence[str]
) -> FurtherFace | None:
    """The first of the helpful faces that, added to those at hand, meets most of what is left."""
    best: FurtherFace | None = None
    for face in HELPFUL_FACES:
        if face in faces:
            continue
        more = [
            what_it_shows(analysis, one.geometry) for one in candidates(analysis.symmetry.lattice, [face])
        ]
        wanted = [demand for demand in demands_of([*results, *more]) if demand not in cover.met]
        met = tuple(demand for demand in wanted if any(meets(result, demand) for result in more))
        if met and (best is None or len(met) > len(best.meets)):
            best = FurtherFace(face, met)
    return best
