"""How often the printed card and the cuvettes before it are found: simulated photos, 25° tilt, 10° roll, blur.

Prints a table and one line of JSON; with --strict it fails below 99 %.
"""

# ruff: noqa: E402  (the folders that are imported from must be on the path first)
from __future__ import annotations

import argparse
import json
import sys
from pathlib import Path

import numpy as np

sys.path[:0] = [str(Path(__file__).resolve().parents[1]), str(Path(__file__).resolve().parents[2])]

from photo.render.cards import CUVETTES, PER_MM, card_scene
from photo.render.geometry import mapped
from photo.render.scenes import picture_of

from chroma.photo.find_card import cuvettes_on_card, find_card
from observers.errors import InputError


def main() -> int:
    """Count over the scenes."""
    options = argparse.ArgumentParser()
    options.add_argument("--scenes", type=int, default=300)
    options.add_argument("--strict", action="store_true")
    chosen = options.parse_args()
    seen = counted = 0
    for number in range(chosen.scenes):
        shown = card_scene(number, paper=("a4", "letter")[number % 2])
        picture = picture_of(shown.jpeg)
        card = find_card(picture)
        if card is None:
            continue
        corners = np.array([[0.0, 0.0], [card.layout.width, card.layout.height]])
        seen += bool(np.abs(card.pixels(corners) - mapped(shown.matrix, corners * PER_MM + shown.offset)).max() < 4)
        try:
            counted += len(cuvettes_on_card(picture, card, CUVETTES)) == CUVETTES
        except InputError:
            continue
    found = {"card_found": seen / chosen.scenes, "cuvettes_found": counted / chosen.scenes}
    for name, share in found.items():
        print(f"{name:16s} {share:.4f}   to reach 0.99")
    print(json.dumps({"photo_cards": found, "scenes": chosen.scenes}))
    return int(chosen.strict and found["card_found"] < 0.99)


if __name__ == "__main__":
    sys.exit(main())
