"""What a detector sees of a lamp through a sample: the overlap of the three over wavelength."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from chroma.quantity import fraction
from chroma.report.plots import GREY, new_axes, short, tint
from chroma.spectra import Spectra
from observers.human import Observer, responsivity_at
from observers.illuminants import Illuminant, power_at

if TYPE_CHECKING:
    from matplotlib.axes import Axes

STYLES = ("-", "--", ":", "-.")


def plot_overlap(lamp: Illuminant, sample: Spectra, detector: Observer, *, ax: Axes | None = None) -> Axes:
    """Lamp, sample (its first) and channels of a detector, with their product shaded, the largest of it at 1.

    Lamp and responsivity are drawn relative to their own peaks on the sample's grid.
    """
    ax = ax or new_axes(7.0, 3.8)
    share = fraction(sample)
    nm, T = share.wavelength_nm, share.values[0]
    power, seen = power_at(lamp, nm), responsivity_at(detector, nm)
    product = power[:, None] * T[:, None] * seen
    ax.plot(nm, _relative(power), color=GREY, linewidth=1.4, linestyle=(0, (5, 1.5)), label=f"lamp {short(lamp.name)}")
    ax.plot(nm, T, color="black", linewidth=1.8, label=f"{share.quantity} of {short(share.names[0])}")
    for k in range(seen.shape[1]):
        style = STYLES[k % len(STYLES)]
        name = detector.name if seen.shape[1] == 1 else f"{detector.name}, channel {k + 1}"
        ax.plot(nm, _relative(seen)[:, k], color="#2b6ca3", linewidth=1.0, linestyle=style, label=name)
        ax.fill_between(nm, 0, _relative(product)[:, k], color="#2b6ca3", alpha=0.18, linewidth=0)
    ax.fill_between([], [], [], color="#2b6ca3", alpha=0.3, label="their product")
    ax.set_xlim(float(nm[0]), float(nm[-1]))
    ax.set_ylim(0, 1.08 * max(1.0, float(T.max())))
    ax.set_xlabel("wavelength / nm")
    ax.set_ylabel("relative to its peak; the sample as it is")
    ax.legend(fontsize=7, frameon=False, ncols=3, loc="lower left", bbox_to_anchor=(0, 1.0))
    tint(ax, float(nm[0]), float(nm[-1]))
    return ax


def _relative(values: np.ndarray) -> np.ndarray:
    """Over the largest of all; nothing stays nothing."""
    top = float(values.max())
    result: np.ndarray = values / top if top > 0 else values
    return result
