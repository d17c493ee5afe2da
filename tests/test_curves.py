"""Angle-resolved curves: printed formulas against contraction of turned tensors, and published curves."""

from __future__ import annotations

from functools import lru_cache

import numpy as np
import pytest
from formula_reader import evaluated, is_exact
from literature import of_entry, reference
from scipy.spatial.transform import Rotation

from sitesym.analysis import Analysis, analyse
from sitesym.errors import UsageError
from sitesym.experiment.curves import AngleCurve, angle_curves, curve_notes, face_axes
from sitesym.experiment.phonons import branches
from sitesym.geometry.directions import parse_direction
from sitesym.geometry.notation import parse_geometry

STRUCTURES = {entry["name"]: entry for entry in reference("decompositions.toml")["compound"]}
GEOMETRIES = {entry["name"]: entry for entry in reference("geometries.toml")["crystal"]}
CRYSTALS = (
    "diamond", "zincblende", "pyrite", "spinel", "calcite", "alpha-quartz", "lithium niobate", "scheelite", "rutile",
    "molybdenite 2H", "lithium iodate, alpha", "wurtzite (zinc oxide)", "black phosphorus", "gypsum", "kyanite",
)  # fmt: skip
FACES = ("001", "100", "110", "111", "2-13")
FOUR_FIGURES = 2e-3


@lru_cache(maxsize=64)
def crystal(name: str) -> Analysis:
    return analyse(of_entry(STRUCTURES[name]), scan=False, molecules=False)


@lru_cache(maxsize=64)
def measured_crystal(name: str) -> Analysis:
    return analyse(of_entry(GEOMETRIES[name]), scan=False, molecules=False)


def random_letters(analysis: Analysis, seed: int, *, phases: bool) -> dict[str, complex]:
    names = [letter for row in analysis.species for letter in row.tensor.letters]
    rng = np.random.default_rng(seed)
    values = rng.uniform(-2, 2, len(names)) + 1j * phases * rng.uniform(-2, 2, len(names))
    return dict(zip(names, values.tolist(), strict=True))


def contracted(tensors: list[np.ndarray], curve: AngleCurve, degrees: float) -> tuple[float, float]:
    """Parallel and crossed intensity with the light at rest: the sample is turned clockwise about the face's normal."""
    turn = Rotation.from_rotvec(-np.radians(degrees) * curve.axes.normal.vector).as_matrix()
    e, across = curve.axes.reference.vector, np.cross(curve.axes.normal.vector, curve.axes.reference.vector)
    turned = [turn @ tensor @ turn.T for tensor in tensors]
    return sum(abs(e @ one @ e) ** 2 for one in turned), sum(abs(across @ one @ e) ** 2 for one in turned)


@pytest.mark.parametrize("phases", [False, True], ids=["real", "complex"])
@pytest.mark.parametrize("name", CRYSTALS)
def test_printed_formulas_and_arrays_are_the_contraction_in_the_turned_frame(name: str, phases: bool) -> None:
    """At random angles and letters, for every species and kind of phonon on five faces."""
    analysis = crystal(name)
    for seed, face in enumerate(FACES):
        letters = random_letters(analysis, seed, phases=phases)
        for curve in angle_curves(analysis, face, letters=letters, step=7.5):
            tensor = analysis.species_row(curve.label).tensor
            branch = next(one for one in branches(tensor, curve.axes.normal.vector) if one.kind == curve.phonon)
            values = np.array([letters[letter] for letter in curve.letters])
            tensors = [np.tensordot(values, basis, axes=1) for basis in branch.bases]
            scale = max(float(curve.parallel.max()), float(curve.crossed.max()), 1e-12)
            for k in np.random.default_rng(seed).integers(0, len(curve.degrees), 5):
                degrees = float(curve.degrees[k])
                expected = np.array(contracted(tensors, curve, degrees))
                assert np.allclose([curve.parallel[k], curve.crossed[k]], expected, atol=1e-9 * scale)
                for text, value in zip((curve.parallel_expression, curve.crossed_expression), expected, strict=True):
                    error = abs(evaluated(text, letters, degrees) - value)
                    assert error < (1e-9 if is_exact(text) else FOUR_FIGURES) * scale, (curve, text)


@pytest.mark.parametrize("name", CRYSTALS)
def test_kinds_of_phonons_add_up_to_the_whole_species(name: str) -> None:
    """LO, TO and oblique together are all components of the species, whatever the wavevector."""
    analysis = crystal(name)
    letters = random_letters(analysis, 1, phases=True)
    for face in FACES:
        curves = angle_curves(analysis, face, letters=letters, step=15)
        for label in {curve.label for curve in curves}:
            species = analysis.species_row(label).tensor
            values = np.array([letters[letter] for letter in species.letters])
            tensors = [component.tensor(values) for component in species.components]
            parts = [curve for curve in curves if curve.label == label]
            whole = np.array([contracted(tensors, parts[0], degrees) for degrees in parts[0].degrees])
            found = np.array([sum(one.parallel for one in parts), sum(one.crossed for one in parts)]).T
            assert np.allclose(found, whole)


def on_face(name: str, face: str, label: str, reference: str | None = None) -> AngleCurve:
    analysis = crystal(name)
    direction = parse_direction(reference, analysis.symmetry.lattice) if reference else None
    return next(one for one in angle_curves(analysis, face, reference=direction) if one.name == label)


def printed(name: str, face: str, label: str, reference: str | None = None) -> tuple[str, str]:
    curve = on_face(name, face, label, reference)
    return curve.parallel_expression, curve.crossed_expression


def test_silicon_and_diamond_001() -> None:
    """Common practice (Loudon 1964): counted from [100], T2g goes as sin²2θ in parallel, cos²2θ in crossed light."""
    assert printed("diamond", "001", "T2g", "x") == ("c² sin²2θ", "c² cos²2θ")
    assert printed("diamond", "001", "T2g", "[110]") == ("c² cos²2θ", "c² sin²2θ")


def test_silicon_111_is_isotropic_with_ratio_three_to_two() -> None:
    """Common practice: on (111) nothing changes with the angle, parallel to crossed as 3 to 2."""
    assert printed("diamond", "111", "T2g") == ("c²", "2 c²/3")


def test_silicon_110_has_its_known_values() -> None:
    """Common practice: nothing for e along [001], d² along [1-10], 4/3 d² along [1-11], all parallel."""
    curve = on_face("diamond", "110", "T2g", "[001]")
    angles = {0.0: 0.0, 90.0: 1.0, float(np.degrees(np.arccos(1 / np.sqrt(3)))): 4 / 3}
    for degrees, value in angles.items():
        assert evaluated(curve.parallel_expression, {"c": 1.0}, degrees) == pytest.approx(value, abs=1e-12)


def test_zincblende_longitudinal_and_transverse_by_face() -> None:
    """Common practice: backscattering shows LO only on (001), TO only on (110), both on (111)."""
    allowed = {
        face: {one.phonon for one in angle_curves(crystal("zincblende"), face) if one.allowed}
        for face in ("001", "110", "111")
    }
    assert allowed == {"001": {"LO"}, "110": {"TO"}, "111": {"LO", "TO"}}


def test_calcite_basal_face() -> None:
    """Porto, Giordmaine and Damen (1966), tensors of D3d: A1g has xx = yy and no xy; Eg has c in xx and xy alike."""
    assert printed("calcite", "001", "A1g") == ("a²", "0")
    assert printed("calcite", "001", "Eg") == ("c²", "c²")


def test_rutile_type_tensors_of_d4h() -> None:
    """Porto, Fleury and Damen (1967): B1g in x²-y², B2g in xy, Eg in xz and yz, A1g with a in xx and b in zz."""
    assert printed("rutile", "001", "B1g", "x") == ("c² cos²2θ", "c² sin²2θ")
    assert printed("rutile", "001", "B2g", "x") == ("d² sin²2θ", "d² cos²2θ")
    assert printed("rutile", "001", "Eg") == ("0", "0")
    assert printed("rutile", "100", "A1g", "z") == ("(b cos²θ + a sin²θ)²", "(a - b)²/4 sin²2θ")
    assert printed("rutile", "100", "Eg", "z") == ("e² sin²2θ", "e² cos²2θ")


def test_anatase_basal_face() -> None:
    """Ohsaka, Izumi and Fujiki, J. Raman Spectrosc. 7, 321 (1978), from memory: (001) shows A1g and B1g, never Eg."""
    seen = {one.label for one in angle_curves(crystal("anatase"), "001") if one.allowed}
    assert seen == {"A1g", "B1g"}
    assert printed("anatase", "001", "B1g", "x") == ("c² cos²2θ", "c² sin²2θ")


def test_molybdenite_flake() -> None:
    """Common practice: A1g is gone in crossed light, E2g is the same in both, E1g is not seen from the basal face."""
    assert printed("molybdenite 2H", "001", "A1g") == ("a²", "0")
    assert printed("molybdenite 2H", "001", "E2g") == ("d²", "d²")
    assert not on_face("molybdenite 2H", "001", "E1g").allowed


def test_black_phosphorus_with_complex_letters() -> None:
    """Ribeiro et al., ACS Nano 9, 4270 (2015), from memory: Ag as computed here, B2g sin²2θ.

    There a and c lie in the layer, θ is counted from c, and φ is the phase of c against a.
    """
    analysis = crystal("black phosphorus")
    a, c, phase = 1.3, 0.8, np.radians(70)
    letters = {"a": a, "c": c * np.exp(1j * phase)}
    along_c = parse_direction("z", analysis.symmetry.lattice)
    curves = {one.label: one for one in angle_curves(analysis, "010", reference=along_c, letters=letters)}
    theta = np.radians(curves["Ag"].degrees)
    published = (a * np.sin(theta) ** 2 + c * np.cos(phase) * np.cos(theta) ** 2) ** 2
    published += (c * np.sin(phase) * np.cos(theta) ** 2) ** 2
    assert np.allclose(curves["Ag"].parallel, published)
    assert curves["Ag"].parallel_expression == "|c cos²θ + a sin²θ|²"
    other = next(one for one in curves.values() if one.label != "Ag" and one.allowed)
    assert other.parallel_expression.endswith("² sin²2θ")


def face_of(direction: np.ndarray, lattice: np.ndarray) -> str | None:
    """Small indices of the face whose normal has a direction."""
    raw = lattice @ direction
    raw = raw / np.abs(raw[np.abs(raw) > 1e-6]).min()
    for times in (1, 2, 3, 4):
        whole = np.rint(raw * times)
        if np.abs(whole - raw * times).max() < 1e-6 and np.abs(whole).max() < 10:
            return " ".join(str(int(one)) for one in whole)
    return None


def backscattering_cases() -> list[tuple[str, str]]:
    return [
        (name, geometry["notation"])
        for name, entry in GEOMETRIES.items()
        for geometry in entry["geometry"]
        if not set("*RL") & set(geometry["notation"])
    ]


def test_curves_pass_through_what_is_reported_for_fixed_polarizations() -> None:
    """Every backscattering geometry of the literature with parallel or crossed polarizations: allowed or forbidden."""
    checked = 0
    for name, notation in backscattering_cases():
        analysis = measured_crystal(name)
        geometry = parse_geometry(notation, analysis.symmetry.lattice)
        e, s, k = (
            geometry.incoming.vectors[0].real, geometry.outgoing.vectors[0].real, geometry.incident.vector
        )  # fmt: skip
        face = face_of(k, analysis.symmetry.lattice)
        cosine = abs(e @ s)
        if k @ geometry.scattered.vector > -1 + 1e-9 or face is None or 1e-9 < cosine < 1 - 1e-9:
            continue
        expected = next(one for one in GEOMETRIES[name]["geometry"] if one["notation"] == notation)["expected"]
        letters = random_letters(analysis, 3, phases=False)
        found: dict[str, float] = dict.fromkeys(expected, 0.0)
        for curve in angle_curves(
            analysis, face, reference=parse_direction("z", np.eye(3)) if abs(k[2]) < 0.9 else None
        ):
            text = curve.parallel_expression if cosine > 0.5 else curve.crossed_expression
            degrees = float(np.degrees(np.arctan2(e @ curve.axes.across.vector, e @ curve.axes.reference.vector)))
            found[curve.label] += evaluated(text, letters, degrees)
        words = {label: "allowed" if value > 1e-5 else "forbidden" for label, value in found.items()}
        assert words == expected, (name, notation)
        checked += 1
    assert checked > 120


def test_reference_and_offset() -> None:
    """A reference turned by 30° moves the curve by 30°; a direction out of the face is projected on it."""
    analysis = crystal("rutile")
    first = {one.name: one for one in angle_curves(analysis, "100", step=10)}
    turned = face_axes(analysis, "100", parse_direction("[0 173205 100000]", np.eye(3)))
    second = {one.name: one for one in angle_curves(analysis, "100", reference=turned.reference, step=10)}
    angle = np.degrees(
        np.arctan2(
            turned.reference.vector @ first["A1g"].axes.across.vector,
            turned.reference.vector @ first["A1g"].axes.reference.vector,
        )
    )
    assert angle == pytest.approx(30, abs=1e-3)
    for name, curve in first.items():
        assert np.allclose(
            second[name].parallel, [*np.roll(curve.parallel[:-1], -3), second[name].parallel[0]], atol=1e-3
        )
    tilted = face_axes(analysis, "001", parse_direction("[1 0 1]", analysis.symmetry.lattice))
    assert np.allclose(tilted.reference.vector, [1, 0, 0])


def test_axes_of_the_face_are_right_handed() -> None:
    for name in CRYSTALS:
        for face in FACES:
            axes = face_axes(crystal(name), face)
            frame = np.array([axes.reference.vector, axes.across.vector, axes.normal.vector])
            assert np.allclose(frame @ frame.T, np.eye(3), atol=1e-9)
            assert np.linalg.det(frame) == pytest.approx(1)


def test_letters_not_given_are_named() -> None:
    curve = next(one for one in angle_curves(crystal("calcite"), "100", letters={"a": 2.0}) if one.label == "A1g")
    assert curve.assumed == ("b",)
    assert curve.values.tolist() == [2, 0.6]


def test_forward_scattering_makes_no_difference_of_longitudinal_and_transverse() -> None:
    """Where q is too small the kinds of phonons merge (polaritons), and all components show."""
    curves = angle_curves(crystal("zincblende"), "110", mount="forward")
    assert [(one.name, one.parallel_expression != "0") for one in curves] == [("T2", True)]


def test_notes_speak_of_birefringence_where_there_is_any() -> None:
    """Common practice: cubic crystals and faces across the optic axis keep the polarization, others turn it."""
    assert curve_notes(crystal("diamond"), face_axes(crystal("diamond"), "110")) == ()
    assert curve_notes(crystal("calcite"), face_axes(crystal("calcite"), "001")) == ()
    assert "θ = 0° and 90°" in curve_notes(crystal("calcite"), face_axes(crystal("calcite"), "100"))[0]
    assert "symmetry does not fix" in curve_notes(crystal("gypsum"), face_axes(crystal("gypsum"), "010"))[0]
    assert "optically active" in curve_notes(crystal("alpha-quartz"), face_axes(crystal("alpha-quartz"), "001"))[0]


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        ({"face": "000"}, "all zero"),
        ({"face": "banana"}, "no set of indices"),
        ({"face": "001", "step": 0.0}, "step of 0°"),
        ({"face": "001", "step": float("nan")}, "step of nan°"),
        ({"face": "001", "mount": "right-angle"}, "cannot be turned about the beam"),
        ({"face": "001", "letters": {"q": 1.0}}, "letter 'q'"),
        ({"face": "001", "letters": {"a": float("inf")}}, "cannot be inf"),
        ({"face": "001", "reference": parse_direction("z", np.eye(3))}, "normal to the face"),
    ],
)
def test_what_cannot_be_is_said(arguments: dict, words: str) -> None:
    with pytest.raises(UsageError, match=words):
        angle_curves(crystal("calcite"), **arguments)
