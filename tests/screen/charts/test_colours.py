"""Colours by numbers: contrast by the formula of WCAG 2.2, and what is left of them to colour-blind eyes."""

import itertools
import tomllib
from pathlib import Path

import numpy as np
import pytest

from engine.screen.charts.diagram import COLOURS

ROOT = Path(__file__).parents[3]
WORDS, LINES = ("text", "muted"), ("vermilion", "green", "pink", "blue")
# Machado, Oliveira and Fernandes (2009), severity 1.0, on linear RGB; coefficients from memory
BLIND = {
    "protanopia": [[0.152286, 1.052583, -0.204868], [0.114503, 0.786281, 0.099216], [-0.003882, -0.048116, 1.051998]],
    "deuteranopia": [[0.367322, 0.860646, -0.227968], [0.280085, 0.672501, 0.047413], [-0.011820, 0.042940, 0.968881]],
}


def linear(colour):
    """sRGB without its gamma (IEC 61966-2-1)."""
    coded = np.array([int(colour[k:k + 2], 16) for k in (1, 3, 5)]) / 255
    return np.where(coded <= 0.04045, coded / 12.92, ((coded + 0.055) / 1.055) ** 2.4)


def contrast(one, other):
    """Contrast ratio of WCAG 2.2: (lighter + 0.05) / (darker + 0.05), in relative luminance."""
    light, dark = sorted((float(linear(c) @ (0.2126, 0.7152, 0.0722)) for c in (one, other)), reverse=True)
    return (light + 0.05) / (dark + 0.05)


def lab(rgb):
    """CIE L*a*b* of linear RGB, white D65."""
    to_xyz = np.array([[0.4124564, 0.3575761, 0.1804375], [0.2126729, 0.7151522, 0.0721750],
                       [0.0193339, 0.1191920, 0.9503041]])
    x, y, z = (to_xyz @ rgb) / (0.95047, 1.0, 1.08883)
    fx, fy, fz = (t ** (1 / 3) if t > (6 / 29) ** 3 else t / (3 * (6 / 29) ** 2) + 4 / 29 for t in (x, y, z))
    return np.array([116 * fy - 16, 500 * (fx - fy), 200 * (fy - fz)])


def test_the_formula_gives_its_ends():
    assert contrast("#ffffff", "#000000") == pytest.approx(21.0)
    assert contrast("#777777", "#ffffff") == pytest.approx(4.48, abs=0.005)  # the well-known grey that just fails


@pytest.mark.parametrize("theme", ["light", "dark"])
def test_words_and_lines_stand_out_in_both_themes(theme):
    behind = getattr(COLOURS["background"], theme)
    for name in WORDS:  # success criterion 1.4.3
        assert contrast(getattr(COLOURS[name], theme), behind) >= 4.5, name
    for name in LINES:  # success criterion 1.4.11
        assert contrast(getattr(COLOURS[name], theme), behind) >= 3.0, name
    settings = tomllib.loads((ROOT / ".streamlit" / "config.toml").read_text())
    assert contrast(settings["theme"][theme]["primaryColor"], behind) >= 4.5


@pytest.mark.parametrize("kind", BLIND)
@pytest.mark.parametrize("theme", ["light", "dark"])
def test_lines_stay_apart_for_colour_blind_eyes(kind, theme):
    """A difference of 2.3 can just be seen; lines are thin, so several times that (and shape and dash besides)."""
    seen = {name: lab(np.clip(BLIND[kind] @ linear(getattr(COLOURS[name], theme)), 0, 1)) for name in (*LINES, "text")}
    for one, other in itertools.combinations(seen, 2):
        assert np.linalg.norm(seen[one] - seen[other]) > 15.0, (one, other)
