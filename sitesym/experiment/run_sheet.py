"""Everything for one session at the spectrometer: `plan(analysis, ...)` makes it, views show it."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from sitesym.analysis import Analysis
from sitesym.errors import UsageError
from sitesym.experiment.bench import ROOM, LaserBench, check_temperature, laser_bench
from sitesym.experiment.curves import AngleCurve, FaceAxes, angle_curves, curve_notes, face_axes
from sitesym.experiment.faces import sensible_faces
from sitesym.experiment.hazards import Hazards, hazards_of
from sitesym.experiment.infrared import InfraredRow, infrared_rows, infrared_species, infrared_words
from sitesym.experiment.layout import Layout, check_edges, edge_in, edges_of, layout_of
from sitesym.experiment.patterns import Comparison, Pattern, comparisons_of, patterns_of
from sitesym.experiment.plan import Conditions, Measurement, Plan, make_plan
from sitesym.experiment.powder import PowderRow, powder_rows
from sitesym.experiment.refraction import beam_words, cone_words
from sitesym.experiment.shown import raman_rows
from sitesym.experiment.unoriented import Unoriented, unoriented_measurements, unoriented_words
from sitesym.geometry.directions import Direction, face_normal

if TYPE_CHECKING:
    from sitesym.experiment.angle_data import AngleData
    from sitesym.experiment.fitted import CurveFit

SAMPLES = ("crystal", "flake", "film", "grain", "powder")
_THIN = ("flake", "film")
_UNORIENTED = ("grain", "powder")


@dataclass(frozen=True, eq=False)
class Sample:
    """What is there to be measured.

    kind     one of `SAMPLES`.
    faces    indices of its faces; `assumed` where the user named none.
    edges    directions of edges that the user named.
    """

    kind: str
    faces: tuple[str, ...]
    assumed: bool
    edges: tuple[Direction, ...]

    @property
    def is_oriented(self) -> bool:
        """Whether its axes are known."""
        return self.kind not in _UNORIENTED


@dataclass(frozen=True, eq=False)
class Step:
    """One numbered measurement: what it shows, how it stands in the laboratory, what to compare it with.

    refraction  what refraction does to its beams, a plain clause, "" where it does nothing.
    """

    measurement: Measurement
    layout: Layout
    comparison: Comparison | None
    refraction: str


@dataclass(frozen=True, eq=False)
class InfraredFace:
    """Polarized infrared spectra on one face."""

    face: str
    rows: tuple[InfraredRow, ...]


@dataclass(frozen=True, eq=False)
class CurveFace:
    """Angle-resolved curves on one face, with what may spoil them."""

    axes: FaceAxes
    curves: tuple[AngleCurve, ...]
    notes: tuple[str, ...]


@dataclass(frozen=True, eq=False)
class RunSheet:
    """The plan of one session.

    raman       polarized Raman measurements; None for samples without orientation, and for crystals without
                Raman-active modes.
    steps       the measurements in order: the chosen ones, or where no faces are known all geometries that the user
                named; `patterns` how to read them together. needed: numbers, from 0, of those that do the work of all.
    asked       geometries that the user named beside faces.
    cone        the cone of the objective in and outside the crystal, a plain clause, "" without an aperture.
    unoriented  what to measure on powders and grains, with `unoriented_words`; else empty.
    powder      limits of depolarization ratios of all Raman-active species.
    infrared    faces with their species; `infrared_words` how to measure and read them: sentences with the faces for
                which they hold.
    fit         of measured angle-resolved curves, None where none were given.
    benches     one for each laser line.
    hazards     cautions.
    """

    analysis: Analysis
    sample: Sample
    raman: Plan | None
    steps: tuple[Step, ...]
    needed: tuple[int, ...]
    asked: tuple[Step, ...]
    cone: str
    patterns: tuple[Pattern, ...]
    unoriented: tuple[Unoriented, ...]
    unoriented_words: tuple[str, ...]
    powder: tuple[PowderRow, ...]
    infrared: tuple[InfraredFace, ...]
    infrared_words: tuple[tuple[tuple[str, ...], str], ...]
    curves: tuple[CurveFace, ...]
    fit: CurveFit | None
    benches: tuple[LaserBench, ...]
    temperature: float
    hazards: Hazards

    def __repr__(self) -> str:
        chosen = ", ".join(step.measurement.result.geometry.notation for step in self.steps)
        return f"RunSheet({self.analysis.structure.formula}, {self.sample.kind}: {chosen or 'no oriented measurement'})"


def plan(
    analysis: Analysis,
    *,
    sample: str = "crystal",
    faces: Sequence[str] = (),
    edges: Sequence[str] = (),
    mounts: Sequence[str] = ("backscattering",),
    analyser: bool = True,
    geometries: Sequence[str] = (),
    infrared: Sequence[str] | None = None,
    curves: Sequence[str] = (),
    letters: Mapping[str, complex] | None = None,
    measured: AngleData | None = None,
    complex_letters: bool = False,
    lasers: Sequence[str | float] = (),
    temperature: float = ROOM,
    conditions: Conditions | None = None,
) -> RunSheet:
    """Plan a session of Raman and infrared measurements.

    sample      "crystal", "flake" or "film" (thin, on the face (001) if none is named), "grain" (orientation unknown),
                "powder".
    faces       indices of its faces, such as "001" or "10-10". If neither faces nor geometries are given, simple ones.
    edges       lattice directions of visible edges, such as "110": angles of the polarizations are told from them.
    mounts      "backscattering", "right-angle", "forward". analyser: whether the scattered light is analysed.
    geometries  to be judged as they stand, such as "z(xy)-z".
    infrared    faces for infrared spectra; by default those of the sample.
    curves      faces for angle-resolved curves; letters: values of tensor letters for them.
    measured    angle-resolved intensities of one band on the only face, to be fitted (see `read_angle_data`);
                complex_letters: with phases, for crystals that absorb.
    lasers      wavelengths in nm, in air unless "… vacuum" says otherwise. temperature: of the sample, K.
    conditions  tilt, aperture and refractive index, for the leakage.

    Raises UsageError for what cannot be.
    """
    check_temperature(temperature)
    thing = _sample(analysis, sample, faces, edges, geometries)
    raman = _raman(analysis, thing, mounts, analyser, geometries, conditions)
    listed = () if raman is None else raman.measurements if raman.faces else raman.asked
    steps = _steps(raman, listed, thing) if raman else ()
    rows = powder_rows(analysis)
    benches = tuple(laser_bench(line, temperature) for line in lasers)
    sides = _infrared_faces(analysis, thing, infrared)
    return RunSheet(
        analysis,
        thing,
        raman,
        steps,
        () if raman is None else tuple(range(len(steps))) if raman.faces else raman.cover.chosen,
        _steps(raman, raman.asked, thing) if raman and raman.faces else (),
        cone_words(raman.conditions.aperture, raman.conditions.index) if raman else "",
        patterns_of([step.measurement.result for step in steps]),
        () if thing.is_oriented else unoriented_measurements(rows),
        () if thing.is_oriented or not rows else unoriented_words(analysis, rows, thing.kind),
        rows,
        sides,
        _infrared_words(analysis, sides),
        tuple(_curve_face(analysis, face, thing, letters) for face in curves),
        None if measured is None else _fit(analysis, thing, measured, complex_letters),
        benches,
        temperature,
        hazards_of(analysis, [bench.laser for bench in benches], temperature),
    )


def _sample(
    analysis: Analysis, kind: str, faces: Sequence[str], edges: Sequence[str], geometries: Sequence[str]
) -> Sample:
    if kind not in SAMPLES:
        raise UsageError(f"'{kind}' is no kind of sample.", f"Choose from {', '.join(SAMPLES)}.")
    if kind in _UNORIENTED and (faces or edges or geometries):
        raise UsageError(
            f"A {kind} has no known face, edge or direction.",
            "Leave --face, --edge and --geometry out, or choose the sample crystal, flake or film.",
        )
    assumed = not faces and not geometries and kind not in _UNORIENTED
    chosen = tuple(faces)
    if assumed:
        chosen = ("001",) if kind in _THIN else sensible_faces(analysis)
    directions = edges_of(analysis, edges)
    if chosen:
        check_edges(analysis, directions, chosen)
    return Sample(kind, chosen, assumed, directions)


def _raman(
    analysis: Analysis,
    sample: Sample,
    mounts: Sequence[str],
    analyser: bool,
    geometries: Sequence[str],
    conditions: Conditions | None,
) -> Plan | None:
    if not sample.is_oriented or not raman_rows(analysis):
        return None
    return make_plan(
        analysis,
        faces=sample.faces,
        mounts=mounts,
        analyser=analyser,
        geometries=geometries,
        conditions=conditions,
        thin=sample.kind in _THIN,
    )


def _steps(raman: Plan, measurements: Sequence[Measurement], sample: Sample) -> tuple[Step, ...]:
    comparisons = comparisons_of([one.result for one in measurements])
    return tuple(
        Step(
            one,
            layout_of(raman.analysis, one.candidate, sample.edges),
            comparison,
            beam_words(one.candidate.geometry, raman.conditions.index),
        )
        for one, comparison in zip(measurements, comparisons, strict=True)
    )


def _infrared_faces(analysis: Analysis, sample: Sample, faces: Sequence[str] | None) -> tuple[InfraredFace, ...]:
    chosen = sample.faces if faces is None else faces
    if not infrared_species(analysis):
        return ()
    return tuple(InfraredFace(face, infrared_rows(analysis, face)) for face in dict.fromkeys(chosen))


def _fit(analysis: Analysis, sample: Sample, measured: AngleData, complex_letters: bool) -> CurveFit:
    from sitesym.experiment.fitting import fit_curves

    if sample.assumed or len(sample.faces) != 1:
        raise UsageError(
            "Measured curves belong to one face, and the sample was not given exactly one.",
            "Name the face on which they were measured.",
        )
    reference = edge_in(face_normal(sample.faces[0], analysis.symmetry.lattice), sample.edges)
    return fit_curves(analysis, sample.faces[0], measured, reference=reference, complex_letters=complex_letters)


def _infrared_words(analysis: Analysis, sides: Sequence[InfraredFace]) -> tuple[tuple[tuple[str, ...], str], ...]:
    """Each sentence once, with the faces for which it holds."""
    said: dict[str, list[str]] = {}
    for one in sides:
        for words in infrared_words(analysis, one.face):
            said.setdefault(words, []).append(one.face)
    return tuple((tuple(faces), words) for words, faces in said.items())


def _curve_face(analysis: Analysis, face: str, sample: Sample, letters: Mapping[str, complex] | None) -> CurveFace:
    reference = edge_in(face_normal(face, analysis.symmetry.lattice), sample.edges)
    axes = face_axes(analysis, face, reference)
    curves = angle_curves(analysis, face, reference=reference, letters=letters)
    return CurveFace(axes, curves, curve_notes(analysis, axes))
