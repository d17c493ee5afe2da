"""Fit of angle-resolved curves: synthetic curves made by hand from the published tensors, with noise of known size."""

from __future__ import annotations

import re
from functools import lru_cache

import numpy as np
import pytest
from literature import of_entry, reference
from scipy.spatial.transform import Rotation

from sitesym.analysis import Analysis, analyse
from sitesym.errors import UsageError
from sitesym.experiment.angle_data import AngleData
from sitesym.experiment.curves import face_axes
from sitesym.experiment.fitted import CurveFit, FittedValue
from sitesym.experiment.fitting import fit_curves
from sitesym.geometry.directions import parse_direction

STRUCTURES = {entry["name"]: entry for entry in reference("decompositions.toml")["compound"]}
DEGREES = np.arange(0.0, 360.0, 10.0)
DRAWS = 200
# Of 200 draws 68.27 % should lie within one standard error; three standard deviations of that binomial number.
EXPECTED = 0.6827 * DRAWS
SPREAD = 3 * np.sqrt(DRAWS * 0.6827 * 0.3173)


@lru_cache(maxsize=64)
def crystal(name: str) -> Analysis:
    return analyse(of_entry(STRUCTURES[name]), scan=False, molecules=False)


def along(direction: str, name: str = "rutile") -> object:
    return parse_direction(direction, crystal(name).symmetry.lattice)


def uniaxial(a: complex, b: complex, degrees: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Loudon (1964), A1g = diag(a, a, b) seen on a prism face with θ from c: by hand."""
    sine, cosine = np.sin(np.radians(degrees)), np.cos(np.radians(degrees))
    return np.abs(b * cosine**2 + a * sine**2) ** 2, np.abs((a - b) * sine * cosine) ** 2


def trigonal(c: float, d: float, degrees: np.ndarray, face: str = "101") -> tuple[np.ndarray, np.ndarray]:
    """Loudon (1964), Eg of -3m with x along the twofold axis, on a face of calcite with θ from its first direction."""
    tensors = np.array([[[c, 0, 0], [0, -c, d], [0, d, 0]], [[0, -c, -d], [-c, 0, 0], [-d, 0, 0]]])
    axes = face_axes(crystal("calcite"), face)
    parallel, crossed = [], []
    for angle in np.radians(degrees):
        e = Rotation.from_rotvec(angle * axes.normal.vector).apply(axes.reference.vector)
        across = np.cross(axes.normal.vector, e)
        parallel.append(sum((e @ one @ e) ** 2 for one in tensors))
        crossed.append(sum((across @ one @ e) ** 2 for one in tensors))
    return np.array(parallel), np.array(crossed)


def noisy(
    species: str, curves: tuple[np.ndarray, np.ndarray], error: float, seed: int, *, stated: bool = True
) -> AngleData:
    rng = np.random.default_rng(seed)
    parallel, crossed = (curve + error * rng.normal(size=len(curve)) for curve in curves)
    errors = np.full(len(DEGREES), error) if stated else None
    return AngleData(species, DEGREES, parallel, crossed, errors, errors)


def coverage(fits: list[CurveFit], truth: dict[str, float]) -> dict[str, int]:
    """How many fits have each value within one standard error of the truth."""
    return {
        name: sum(abs(within(fit.value(name)) - value) <= (fit.value(name).error or 0.0) for fit in fits)
        for name, value in truth.items()
    }


def within(value: FittedValue) -> float:
    """Phases are known but for their common sign."""
    return abs(value.value) if value.name.startswith("phase") else value.value


def assert_covered(found: dict[str, int]) -> None:
    for name, count in found.items():
        assert EXPECTED - SPREAD <= count <= EXPECTED + SPREAD, (name, count)


def test_stated_errors_give_standard_errors_that_cover_the_truth() -> None:
    """200 draws with 2 % noise: ratio, offset, scale and background lie within one standard error in 68 % of them."""
    curves = uniaxial(30.0, -12.0, DEGREES - 12.0)
    curves = (curves[0] + 40, curves[1] + 40)
    fits = [
        fit_curves(crystal("rutile"), "100", noisy("A1g", curves, 18.0, 1000 + seed), reference=along("z"))
        for seed in range(DRAWS)
    ]
    assert_covered(coverage(fits, {"b/a": -0.4, "offset": 12.0, "scale": 900.0, "background": 40.0}))
    assert 0.9 < np.mean([fit.chi_square / fit.freedom for fit in fits]) < 1.1


def test_errors_from_the_scatter_cover_the_truth() -> None:
    """The same for a degenerate species with c and d, no errors stated."""
    curves = trigonal(30.0, 15.0, DEGREES - 20.0)
    curves = (curves[0] + 30, curves[1] + 30)
    fits = [
        fit_curves(crystal("calcite"), "101", noisy("Eg", curves, 20.0, 5000 + seed, stated=False))
        for seed in range(DRAWS)
    ]
    assert_covered(coverage(fits, {"d/c": 0.5, "offset": 20.0, "scale": 900.0, "background": 30.0}))
    assert fits[0].probability is None
    assert "scatter of the points" in fits[0].error_words


def test_phases_and_their_errors_cover_the_truth() -> None:
    """Complex letters of an absorbing crystal: modulus, phase and offset, 200 draws."""
    curves = uniaxial(30.0, 18.0 * np.exp(1j), DEGREES - 10.0)
    curves = (curves[0] + 30, curves[1] + 30)
    fits = [
        fit_curves(
            crystal("rutile"),
            "100",
            noisy("A1g", curves, 18.0, 9000 + seed),
            reference=along("z"),
            complex_letters=True,
        )
        for seed in range(DRAWS)
    ]
    truth = {"|b/a|": 0.6, "phase of b/a": np.degrees(1.0), "offset": 10.0, "scale": 900.0}
    assert_covered(coverage(fits, truth))


def contracted(tensors: np.ndarray, name: str, face: str, degrees: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    axes = face_axes(crystal(name), face)
    turns = Rotation.from_rotvec(np.radians(degrees)[:, None] * axes.normal.vector)
    e, across = turns.apply(axes.reference.vector), turns.apply(axes.across.vector)
    parallel = np.sum(np.abs(np.einsum("ni,mij,nj->nm", e, tensors, e)) ** 2, axis=1)
    crossed = np.sum(np.abs(np.einsum("ni,mij,nj->nm", across, tensors, e)) ** 2, axis=1)
    return parallel, crossed


@pytest.mark.parametrize(
    ("name", "face", "species"),
    [
        ("calcite", "100", "A1g"), ("calcite", "100", "Eg"), ("calcite", "101", "Eg"), ("rutile", "110", "A1g"),
        ("rutile", "001", "B1g"), ("black phosphorus", "010", "Ag"), ("black phosphorus", "111", "Ag"),
        ("gypsum", "010", "Ag"), ("gypsum", "011", "Bg"), ("scheelite", "001", "Bg"), ("scheelite", "101", "Eg"),
        ("spinel", "110", "Eg"), ("spinel", "123", "T2g"), ("pyrite", "110", "Eg"), ("kyanite", "010", "Ag"),
    ],
)  # fmt: skip
@pytest.mark.parametrize("phases", [False, True], ids=["real", "complex"])
def test_curves_without_noise_are_met_exactly(name: str, face: str, species: str, phases: bool) -> None:
    """From any letters and offset: curves are reproduced, and the truth is among the solutions unless some are open."""
    tensor = crystal(name).species_row(species).tensor
    for seed in range(3):
        rng = np.random.default_rng(seed)
        letters = rng.normal(size=len(tensor.letters)) + 1j * phases * rng.normal(size=len(tensor.letters))
        offset = rng.uniform(-80, 80)
        tensors = np.array([component.tensor(letters) for component in tensor.components])
        parallel, crossed = contracted(tensors, name, face, DEGREES - offset)
        data = AngleData(species, DEGREES, parallel + 0.1, crossed + 0.1)
        fit = fit_curves(crystal(name), face, data, complex_letters=phases)
        size = max(parallel.max(), crossed.max())
        assert np.allclose(fit.parallel, data.parallel, atol=1e-5 * size)
        assert np.allclose(fit.crossed, data.crossed, atol=1e-5 * size)
        if not fit.undecided and not fit.unseen:
            assert is_among(letters, offset, fit), (letters, offset, fit, fit.others)


def is_among(letters: np.ndarray, offset: float, fit: CurveFit) -> bool:
    """Whether the truth is the solution or one of those said to be equal to it; all phases may be reversed."""
    wanted = letters / letters[np.abs(letters).argmax()]
    solutions = [(fit.letters, fit.offset), *((one.letters, one.offset) for one in fit.others if one.exact)]
    for found, degrees in solutions:
        turn = abs((degrees - offset + 90) % 180 - 90)
        away = min(np.abs(found - wanted).max(), np.abs(found - wanted.conj()).max())
        if away < 2e-3 and turn < 0.1:
            return True
    return False


def test_other_solutions_that_are_equal_by_symmetry_are_listed() -> None:
    """A1g on a prism face: turned by 90° with a and b exchanged; each alternative gives the very same curves."""
    data = noisy("A1g", uniaxial(30.0, -12.0, DEGREES - 12.0), 5.0, 3)
    fit = fit_curves(crystal("rutile"), "100", data, reference=along("z"))
    assert [one.exact for one in fit.others] == [True]
    other = fit.others[0]
    assert other.offset == pytest.approx(fit.offset - 90)
    assert other.letters[0] == pytest.approx(fit.value("b/a").value)
    assert other.words == f"offset {other.offset:.1f}°, a/b = {other.letters[0].real:.3g} gives the same curves"
    a, b = other.letters
    same = uniaxial(a, b, DEGREES - other.offset)
    scale, background = fit.value("scale").value, fit.value("background").value
    assert np.allclose(scale * same[0] + background, fit.parallel)
    assert np.allclose(scale * same[1] + background, fit.crossed)


def test_fourfold_curve_leaves_the_offset_open_by_quarter_turns() -> None:
    """Common practice: B1g on (001) has four equal lobes, so the offset is known modulo 90° only."""
    angle = np.radians(2 * (DEGREES - 30))
    curves = 100 * np.cos(angle) ** 2, 100 * np.sin(angle) ** 2
    fit = fit_curves(crystal("rutile"), "001", noisy("B1g", curves, 1.0, 4), reference=along("x"))
    assert fit.offset == pytest.approx(30, abs=0.5)
    assert [round(one.offset) for one in fit.others] == [-60]


def test_parallel_curve_alone_says_what_the_crossed_one_would_tell() -> None:
    """Eg on (100), c² sin⁴θ + d² sin²2θ: nothing fixes the sign of d against c, in neither curve."""
    c, d = 20.0, 12.0
    angle = np.radians(DEGREES)
    parallel = c**2 * np.sin(angle) ** 4 + d**2 * np.sin(2 * angle) ** 2
    data = AngleData("Eg", DEGREES, parallel + np.random.default_rng(1).normal(size=36), None, np.ones(36))
    fit = fit_curves(crystal("calcite"), "100", data, reference=along("z", "calcite"))
    assert fit.value("d/c").value == pytest.approx(0.6, abs=0.02)
    assert [round(float(one.letters.real[1]), 1) for one in fit.others] == [-0.6]


def ratios(fit: CurveFit, *, exact: bool) -> list[float]:
    """c/d of the other solutions."""
    return [float((one.letters[0] / one.letters[1]).real) for one in fit.others if one.exact == exact]


def test_second_solution_of_one_curve_is_found_and_the_other_curve_decides() -> None:
    """On (011) of calcite two values of c/d give one and the same parallel curve; the crossed curves differ."""
    parallel, crossed = trigonal(0.8, 1.3, DEGREES - 25, "011")
    fit = fit_curves(crystal("calcite"), "011", AngleData("Eg", DEGREES, parallel))
    found = [fit.value("c/d").value, *ratios(fit, exact=True)]
    assert min(abs(ratio - 0.8 / 1.3) for ratio in found) < 1e-3
    assert len(found) == 2
    assert fit.others[0].words.endswith("gives the same curve; the crossed one would tell")
    both = fit_curves(crystal("calcite"), "011", AngleData("Eg", DEGREES, parallel, crossed))
    assert both.value("c/d").value == pytest.approx(0.8 / 1.3, abs=1e-5)
    assert both.others == ()


def test_solution_that_fits_about_as_well_is_listed() -> None:
    """With 5 % noise a quite different c/d, turned by 90°, cannot be excluded: χ² differs by less than 4."""
    curves = trigonal(0.8, 1.3, DEGREES - 25, "011")
    error = 0.05 * float(max(curves[0].max(), curves[1].max()))
    fits = [fit_curves(crystal("calcite"), "011", noisy("Eg", curves, error, seed)) for seed in range(10)]
    near = [one for fit in fits for one in fit.others if not one.exact]
    assert near
    assert all("fits about as well" in one.words for one in near)
    for fit in fits:
        assert all(0 <= one.chi_square - fit.chi_square <= 4 for one in fit.others)
        found = [fit.value("c/d").value, *ratios(fit, exact=False)]
        assert min(abs(ratio - 0.8 / 1.3) for ratio in found) < 0.06


@pytest.mark.parametrize(
    ("name", "face", "species", "letters", "open_"),
    [
        # (c cos2θ + d sin2θ)² of C4h is c²+d² times cos²(2θ - arctan(d/c)): only the sum of both angles shows.
        ("scheelite", "001", "Bg", (2.0, 1.0), {"the offset", "the scale", "c/d"}),
        # xx = yy and no xy: isotropic.
        ("calcite", "001", "A1g", (2.0, 1.0), {"the offset"}),
        # e² + f² in both curves.
        ("lithium iodate, alpha", "001", "E2", (2.0, 1.0), {"e/f", "the scale"}),
        # the same number in both curves at every angle.
        ("molybdenite 2H", "001", "E2g", (2.0,), {"the background", "the scale"}),
    ],
)
def test_what_the_data_cannot_decide_is_said(
    name: str, face: str, species: str, letters: tuple[float, ...], open_: set[str]
) -> None:
    """Cases that follow by hand from the tensors of the class (Loudon 1964)."""
    tensor = crystal(name).species_row(species).tensor
    tensors = np.array([component.tensor(np.array(letters)) for component in tensor.components])
    fit = fit_curves(crystal(name), face, noisy(species, contracted(tensors, name, face, DEGREES - 17), 0.05, 8))
    assert open_ in [named(sentence) for sentence in fit.undecided]
    assert fit.value("offset").held
    assert fit.value("offset").value == 0
    assert fit.probability is not None
    assert fit.probability > 1e-3


def named(sentence: str) -> set[str]:
    """What a sentence says to be open; ratios the one way or the other."""
    words = re.match(r"The data (?:cannot decide between|say nothing about) ([^:]*):", sentence)
    assert words is not None
    parts = re.split(r", | and ", words[1])
    return {"/".join(sorted(part.split("/"))) if "/" in part else part for part in parts}


def test_background_and_phase_cannot_both_come_from_a_parallel_curve() -> None:
    """By hand: |a|², |b|², Re a*b, background are four unknowns for three harmonics (1, cos2θ, cos4θ)."""
    curves = uniaxial(30.0, 18.0 * np.exp(1j), DEGREES - 10.0)
    data = AngleData("A1g", DEGREES, curves[0])
    fit = fit_curves(crystal("rutile"), "100", data, reference=along("z"), complex_letters=True)
    assert fit.undecided[0].startswith(
        "The data cannot decide between the background, the scale, |b/a| and the phase of b/a"
    )
    assert fit.value("background").held
    assert abs(fit.value("phase of b/a").value) == pytest.approx(np.degrees(1.0), abs=0.01)
    assert "All phases may be reversed together: intensities do not tell." in fit.doubts


def test_real_letters_in_a_complex_fit_are_said_to_do() -> None:
    fit = fit_curves(
        crystal("rutile"), "100", noisy("A1g", uniaxial(30.0, 18.0, DEGREES), 15.0, 2), reference=along("z"),
        complex_letters=True,
    )  # fmt: skip
    phase = fit.value("phase of b/a")
    assert abs(phase.value) < 20
    if phase.error is not None and not np.isfinite(phase.error):
        assert any("real letters do" in one for one in fit.doubts)


def test_wrong_assignment_shows_in_the_fit() -> None:
    """Two-lobed A1g curves assigned to the four-lobed Eg: further from the fit than the errors allow."""
    data = noisy("Eg", uniaxial(30.0, 12.0, DEGREES), 5.0, 6)
    fit = fit_curves(crystal("rutile"), "100", data, reference=along("z"))
    assert fit.probability == pytest.approx(0, abs=1e-6)
    assert any("further from the fit than the stated errors allow" in one for one in fit.doubts)


def test_nearly_isotropic_curve_hardly_decides_the_offset() -> None:
    fit = fit_curves(
        crystal("rutile"), "100", noisy("A1g", uniaxial(30.0, 29.8, DEGREES - 20), 30.0, 6), reference=along("z")
    )
    assert any("the offset only to within" in one or "the offset not at all" in one for one in fit.doubts)


def test_same_data_same_answer() -> None:
    data = noisy("A1g", uniaxial(30.0, -12.0, DEGREES - 12.0), 18.0, 1)
    first, second = (fit_curves(crystal("rutile"), "100", data, reference=along("z")) for _ in range(2))
    assert first.values == second.values


def test_unit_of_the_data_does_not_matter() -> None:
    data = noisy("A1g", uniaxial(30.0, -12.0, DEGREES - 12.0), 18.0, 1, stated=False)
    assert data.parallel is not None
    assert data.crossed is not None
    large = AngleData("A1g", DEGREES, data.parallel * 1e6, data.crossed * 1e6)
    first, second = (fit_curves(crystal("rutile"), "100", one, reference=along("z")) for one in (data, large))
    assert second.value("scale").value == pytest.approx(1e6 * first.value("scale").value, rel=1e-6)
    assert second.value("b/a").error == pytest.approx(first.value("b/a").error, rel=1e-4)
    assert second.chi_square == pytest.approx(1e12 * first.chi_square, rel=1e-6)


def test_points_that_are_missing_are_left_out() -> None:
    curves = uniaxial(30.0, -12.0, DEGREES - 12.0)
    holes = curves[0].copy()
    holes[[3, 7, 20]] = np.nan
    fit = fit_curves(crystal("rutile"), "100", AngleData("A1g", DEGREES, holes, curves[1]), reference=along("z"))
    assert fit.freedom == 72 - 3 - 4
    assert fit.value("b/a").value == pytest.approx(-0.4, abs=1e-6)
    residual, _ = fit.residuals
    assert residual is not None
    assert np.isnan(residual[3])
    assert np.nanmax(np.abs(residual)) < 1e-3


def test_fitted_curves_at_any_angle() -> None:
    fit = fit_curves(
        crystal("rutile"), "100", AngleData("A1g", DEGREES, *uniaxial(30, -12, DEGREES - 12)), reference=along("z"),
        background=False,
    )  # fmt: skip
    fine = np.linspace(0, 360, 77)
    assert np.allclose(fit.intensities(fine), uniaxial(30, -12, fine - 12), atol=1e-2)
    assert "background" not in [one.name for one in fit.values]


def test_kind_of_phonon_is_chosen_by_name() -> None:
    """On (111) of zincblende LO and TO both show (common practice), so the band must be named."""
    flat = np.full(36, 10.0) + np.random.default_rng(2).normal(size=36)
    with pytest.raises(UsageError, match=r"T2 shows as T2\(LO\) and T2\(TO\) on this face"):
        fit_curves(crystal("zincblende"), "111", AngleData("T2", DEGREES, flat))
    assert fit_curves(crystal("zincblende"), "111", AngleData("T2(LO)", DEGREES, flat)).seen.phonon == "LO"
    with pytest.raises(UsageError, match="has no T2"):
        fit_curves(crystal("zincblende"), "111", AngleData("T2(oblique)", DEGREES, flat))


@pytest.mark.parametrize(
    ("face", "data", "words"),
    [
        ("001", AngleData("Eu", DEGREES, DEGREES), "no Raman-active species"),
        ("001", AngleData("Eg", DEGREES, DEGREES), "shows nothing of Eg"),
        ("001", AngleData("A1g", DEGREES, None, DEGREES), "vanish for A1g"),
        ("100", AngleData("A1g", [0, 45, 90, 135], [1, 2, 3, 2]), "too few angles"),
        ("100", AngleData("A1g", [0, 180, 360, 90, 270, 45], [1, 1, 1, 2, 2, 3]), "too few angles"),
        ("100", AngleData("A1g", DEGREES, np.zeros(36)), "No intensity is positive"),
        ("100", AngleData("A1g", DEGREES, np.full(36, np.nan)), "no intensities"),
    ],
)
def test_what_cannot_be_fitted_is_said(face: str, data: AngleData, words: str) -> None:
    with pytest.raises(UsageError, match=words):
        fit_curves(crystal("rutile"), face, data)
