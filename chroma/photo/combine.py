"""Several photos of one rack: one answer, widened by what they disagree about."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from chroma.photo.estimate import Estimate, Part, PhotoEstimate
from observers.errors import InputError

HALF = 1.96


def combined(photos: Sequence[PhotoEstimate]) -> PhotoEstimate:
    """One estimate from several photos of the same rack.

    Photos share phone, lamp and dye, so most of their error is common and does not average out: the interval keeps the
    mean width of one photo's and adds the standard error of their scatter. Raises InputError for different racks.
    """
    head = photos[0]
    names = [estimate.name for estimate in head.estimates]
    for photo in photos[1:]:
        if [estimate.name for estimate in photo.estimates] != names:
            raise InputError("photos of different racks", why="only photos of one rack are combined")
    if len(photos) == 1:
        return head
    rows = zip(*(photo.estimates for photo in photos), strict=True)
    estimates = tuple(_joined(list(row)) for row in rows)
    return replace(
        head,
        estimates=estimates,
        detection=tuple(np.mean([photo.detection for photo in photos], axis=0).tolist()),
        lamps={
            name: float(np.mean([photo.lamps.get(name, 0.0) for photo in photos]))
            for name in dict.fromkeys(name for photo in photos for name in photo.lamps)
        },
        unexplained=float(np.mean([photo.unexplained for photo in photos])),
        flags=tuple(dict.fromkeys(flag for photo in photos for flag in photo.flags)),
        notes=(f"{len(photos)} photos combined", *dict.fromkeys(note for photo in photos for note in photo.notes)),
        sources=tuple(dict.fromkeys(source for photo in photos for source in photo.sources)),
    )


def _joined(rows: Sequence[Estimate]) -> Estimate:
    parts, disagree = [], False
    for same in zip(*(row.parts for row in rows), strict=True):
        part, apart = _mean(same)
        parts.append(part)
        disagree |= apart
    flags = list(dict.fromkeys(flag for row in rows for flag in row.flags))
    return Estimate(
        rows[0].name,
        tuple(parts),
        (*flags, "photos disagree") if disagree else tuple(flags),
        min(row.on_path for row in rows),
    )


def _mean(parts: Sequence[Part]) -> tuple[Part, bool]:
    """The mean with its interval, and whether the photos differ by more than their own intervals allow."""
    middle = np.array([part.middle for part in parts])
    below = np.array([part.middle - part.low for part in parts])
    above = np.array([part.high - part.middle for part in parts])
    scatter = middle.std(ddof=1)
    extra = (HALF * scatter) ** 2 / len(parts)
    centre = float(middle.mean())
    low = centre - np.sqrt((below**2).mean() + extra)
    high = centre + np.sqrt((above**2).mean() + extra)
    own = (below + above).mean() / (2 * HALF)
    return Part(centre, float(max(low, 0.0)), float(high)), bool(scatter > 2 * own)
