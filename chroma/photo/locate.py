"""Where the cuvettes of a rack stand in a photo: as the rack says, before the printed card, or as columns found."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from chroma.photo.find import find_columns
from chroma.photo.picture import Picture
from chroma.photo.rack import Box, Cuvette, with_boxes
from observers.arrays import Array
from observers.errors import InputError


@dataclass(frozen=True, eq=False)
class Located:
    """A rack with boxes, the corners (4, 2) of a field known to be white or None, and notes on how they were found."""

    cuvettes: tuple[Cuvette, ...]
    field: Array | None
    notes: tuple[str, ...]


def located(picture: Picture, rack: Sequence[Cuvette]) -> Located:
    """The rack with its boxes; a rack without any is laid over the photo from the left, by the card where there is one.

    Raises InputError when the cuvettes cannot be found or are not as many as the rack has rows.
    """
    if rack[0].box is not None:
        return Located(tuple(rack), None, ("boxes as the rack gives them",))
    try:
        from chroma.photo.find_card import cuvettes_on_card, find_card, steps_in_order

        card, missing = find_card(picture), ""
    except InputError as error:
        if "detector" not in error.what:
            raise
        card, missing = None, " (the card was not looked for: the marker detector is not installed)"
    if card is None:
        boxes = find_columns(picture, len(rack))
        notes = (f"no card seen{missing}: cuvettes found as columns on the bright ground; look at the overlay picture",)
        return Located(_named(rack, boxes), None, notes)
    boxes = cuvettes_on_card(picture, card, len(rack))
    note = f"card found by {card.markers} of its 4 markers ({card.layout.paper}); cuvettes counted from the left"
    upset = (
        ()
        if steps_in_order(picture, card)
        else ("warning: the card's grey steps are not in order: glare or overexposure",)
    )
    return Located(_named(rack, boxes), card.field, (note, *upset))


def _named(rack: Sequence[Cuvette], boxes: Sequence[Box]) -> tuple[Cuvette, ...]:
    return with_boxes(rack, dict(zip((cuvette.name for cuvette in rack), boxes, strict=True)))
