"""The colours, by calculation: contrast on white, and distance to the normal eye and with each cone deficiency."""

from __future__ import annotations

from itertools import combinations

import numpy as np
import pytest

from soacheck.show.figures import palette

# Source: G. M. Machado, M. M. Oliveira, L. A. F. Fernandes, IEEE Trans. Visualization and Computer Graphics 15 (2009)
# 1291-1298, table 1, severity 1.0, for linear RGB (from memory).
DEFICIENCIES = {
    "none": np.eye(3),
    "protanopia": np.array(
        [[0.152286, 1.052583, -0.204868], [0.114503, 0.786281, 0.099216], [-0.003882, -0.048116, 1.051998]]
    ),
    "deuteranopia": np.array(
        [[0.367322, 0.860646, -0.227968], [0.280085, 0.672501, 0.047413], [-0.011820, 0.042940, 0.968881]]
    ),
    "tritanopia": np.array(
        [[1.255528, -0.076749, -0.178779], [-0.078411, 0.930809, 0.147602], [0.004733, 0.691367, 0.303900]]
    ),
}
# Source: IEC 61966-2-1 (sRGB, D65), CIE 15 (L*a*b*).
TO_XYZ = np.array(
    [[0.4124564, 0.3575761, 0.1804375], [0.2126729, 0.7151522, 0.0721750], [0.0193339, 0.1191920, 0.9503041]]
)


def linear(colour: str) -> np.ndarray:
    code = np.array([int(colour[k : k + 2], 16) for k in (1, 3, 5)]) / 255
    return np.where(code <= 0.04045, code / 12.92, ((code + 0.055) / 1.055) ** 2.4)


def lab(rgb: np.ndarray) -> np.ndarray:
    xyz = TO_XYZ @ rgb / TO_XYZ.sum(axis=1)
    f = np.where(xyz > 216 / 24389, np.cbrt(xyz), (24389 / 27 * xyz + 16) / 116)
    return np.array([116 * f[1] - 16, 500 * (f[0] - f[1]), 200 * (f[1] - f[2])])


def distance(one: str, other: str, deficiency: str) -> float:
    """CIE 1976 colour difference as seen with a deficiency."""
    seen = [lab(np.clip(DEFICIENCIES[deficiency] @ linear(colour), 0.0, 1.0)) for colour in (one, other)]
    return float(np.linalg.norm(seen[0] - seen[1]))


def contrast(one: str, other: str) -> float:
    """WCAG 2: (L1 + 0.05)/(L2 + 0.05) of the relative luminances."""
    light, dark = sorted((float(TO_XYZ[1] @ linear(colour)) for colour in (one, other)), reverse=True)
    return (light + 0.05) / (dark + 0.05)


def test_the_calculation_gives_the_known_ends() -> None:
    # Analytic limit: black on white is 21:1 and 100 apart in L*, whatever the deficiency.
    assert contrast("#000000", "#ffffff") == pytest.approx(21.0, rel=1e-6)
    for deficiency, matrix in DEFICIENCIES.items():
        assert matrix.sum(axis=1) == pytest.approx(1.0, abs=2e-5)  # a grey stays that grey
        assert distance("#000000", "#ffffff", deficiency) == pytest.approx(100.0, abs=0.1)


def test_red_and_green_of_equal_lightness_meet_with_deuteranopia_in_this_calculation() -> None:
    # The calculation can fail: a pair that is far apart to the normal eye and close to the other.
    assert distance("#d04848", "#7f7f2f", "none") > 50
    assert distance("#d04848", "#7f7f2f", "deuteranopia") < 25


@pytest.mark.parametrize("name", palette.COLOURS)
def test_every_colour_that_carries_meaning_can_be_read_as_text_on_white(name: str) -> None:
    # Published: WCAG 2.1, 1.4.3 asks 4.5:1 of text, 1.4.11 asks 3:1 of graphics.
    assert contrast(palette.COLOURS[name], palette.GROUND) >= 4.5


@pytest.mark.parametrize("deficiency", DEFICIENCIES)
@pytest.mark.parametrize(("one", "other"), list(combinations(palette.COLOURS, 2)))
def test_any_two_colours_stay_apart(one: str, other: str, deficiency: str) -> None:
    assert distance(palette.COLOURS[one], palette.COLOURS[other], deficiency) >= 20


@pytest.mark.parametrize("picture", palette.MEET)
def test_strokes_that_meet_in_a_picture_differ_without_their_colour(picture: str) -> None:
    for one, other in combinations(palette.MEET[picture], 2):
        thick, thin = max(one.width, other.width), min(one.width, other.width)
        assert one.dash != other.dash or thick / thin >= 1.5, (one, other)


def test_points_differ_by_shape_or_filling() -> None:
    spots = (palette.HOT, palette.REST, palette.END)
    assert len({(spot.marker, spot.face == palette.GROUND) for spot in spots}) == len(spots)


def test_every_role_uses_one_of_the_measured_colours() -> None:
    used = {entry.colour for entry in vars(palette).values() if isinstance(entry, palette.Stroke | palette.Spot)}
    used |= {stroke.colour for stroke in palette.LOCI}
    assert used <= set(palette.COLOURS.values())
