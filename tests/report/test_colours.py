"""The page's colours: readable on their paper, and told apart also by eyes that see no red or no green."""

from __future__ import annotations

import itertools
import re
from importlib.resources import files

import numpy as np
import pytest

CSS = files("hedgerow.report").joinpath("pages", "colours.css").read_text(encoding="utf-8")
LIGHT, DARK = re.findall(r":root \{(.*?)\}", CSS, re.DOTALL)[:2]

# Machado, Oliveira & Fernandes 2009, "A Physiologically-based Model for Simulation of Color Vision
# Deficiency", IEEE Transactions on Visualization and Computer Graphics 15, severity 1.0 (from memory).
EYES = {
    "all colours": np.eye(3),
    "no red": np.array(
        [
            [0.152286, 1.052583, -0.204868],
            [0.114503, 0.786281, 0.099216],
            [-0.003882, -0.048116, 1.051998],
        ]
    ),
    "no green": np.array(
        [
            [0.367322, 0.860646, -0.227968],
            [0.280085, 0.672501, 0.047413],
            [-0.011820, 0.042940, 0.968881],
        ]
    ),
}
LEAST_APART = 9.0
"""CIELAB distance of two of the first five series; a just noticeable difference is about 2.3."""


def colours(block: str) -> dict[str, np.ndarray]:
    """The colours of a block by name, sRGB in 0 to 1."""
    found = re.findall(r"--([\w-]+): #([0-9a-f]{6});", block)
    return {name: np.array([int(code[at : at + 2], 16) for at in (0, 2, 4)]) / 255.0 for name, code in found}


def linear(srgb: np.ndarray) -> np.ndarray:
    """Linear light of sRGB (IEC 61966-2-1)."""
    return np.where(srgb <= 0.04045, srgb / 12.92, ((srgb + 0.055) / 1.055) ** 2.4)


def contrast(one: np.ndarray, other: np.ndarray) -> float:
    """The contrast ratio of the Web Content Accessibility Guidelines 2.2."""
    lights = sorted(float(linear(colour) @ [0.2126, 0.7152, 0.0722]) for colour in (one, other))
    return (lights[1] + 0.05) / (lights[0] + 0.05)


def lab(light: np.ndarray) -> np.ndarray:
    """CIELAB (D65) of linear sRGB."""
    to_xyz = np.array([[0.4124, 0.3576, 0.1805], [0.2126, 0.7152, 0.0722], [0.0193, 0.1192, 0.9505]])
    ratio = to_xyz @ np.clip(light, 0.0, 1.0) / [0.9505, 1.0, 1.089]
    x, y, z = np.where(ratio > 0.008856, np.cbrt(ratio), 7.787 * ratio + 16.0 / 116.0)
    return np.array([116.0 * y - 16.0, 500.0 * (x - y), 200.0 * (y - z)])


@pytest.mark.parametrize("block", [LIGHT, DARK], ids=["light", "dark"])
def test_lines_and_words_stand_out_from_their_paper(block: str) -> None:
    """At least 3 for lines, 4.5 for words, on the page and on its cards."""
    known = colours(block)
    words = {"ink": 7.0, "soft": 4.5, "accent": 4.5, "good": 4.5, "bad": 4.5, "focus": 3.0}
    for name, least in words.items():
        assert min(contrast(known[name], known[paper]) for paper in ("paper", "card")) >= least, name
    for name in [*(f"series-{at}" for at in range(8)), "other"]:
        assert contrast(known[name], known["paper"]) >= 3.0, name


@pytest.mark.parametrize("eyes", EYES)
@pytest.mark.parametrize("block", [LIGHT, DARK], ids=["light", "dark"])
def test_series_are_told_apart(block: str, eyes: str) -> None:
    """Every two of the first five series, as these eyes see them."""
    known = colours(block)
    seen = {f"series-{at}": lab(EYES[eyes] @ linear(known[f"series-{at}"])) for at in range(5)}
    apart = {
        (one, other): float(np.linalg.norm(seen[one] - seen[other]))
        for one, other in itertools.combinations(seen, 2)
    }
    assert min(apart.values()) >= LEAST_APART, min(apart.items(), key=lambda item: item[1])
