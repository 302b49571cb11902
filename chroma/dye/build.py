"""From a dilution series to a dye: the fit, its linearity and its calibration line, put together."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import TYPE_CHECKING, Any, cast

import numpy as np

from chroma.calibration import Line, decision_limit, detection_limit, fit_line, quantification_limit
from chroma.dye.fit import Fitted, fit
from chroma.dye.linearity import FRACTION, Linearity, linearity
from chroma.dye.model import ConcentrationUnit, Dye, peak_band
from chroma.dye.series import Series
from chroma.spectra import Source
from observers.errors import InputError

if TYPE_CHECKING:
    from chroma.frames import Library

LINE_FIELDS = ("slope", "intercept", "residual_standard_deviation", "x_mean", "y_mean", "Sxx", "total_weight", "r")


@dataclass(frozen=True, eq=False)
class DyeFit:
    """A dye with all that its fit showed: the series, the fit, the judgement of linearity, the line at the peak."""

    dye: Dye
    series: Series
    fitted: Fitted
    linearity: Linearity
    line: Line | None

    def _repr_html_(self) -> str:
        from chroma.notebook import fit_html

        return fit_html(self)

    def to_frame(self, library: Library | None = None) -> Any:
        """A table of pandas or polars, one row a wavelength."""
        from chroma.frames import fit_columns, frame

        return frame(fit_columns(self), library)


def fit_dye(
    data: Series,
    *,
    name: str,
    intercept: bool = False,
    stray_light: float | None = 0.0,
    fraction: float = FRACTION,
    molar_mass: float | None = None,
    sources: tuple[Source, ...] = (),
    created: str = "",
    program: str = "",
) -> DyeFit:
    """Fit a series and judge it; ``stray_light`` None fits the stray fraction too.

    Raises InputError as `chroma.dye.fit.fit` does, and when the absorptivity comes out negative beyond its uncertainty
    where the dye is seen (380–780 nm): then the blank or the concentrations are wrong.
    """
    found = fit(data, intercept=intercept, stray_light=stray_light)
    _refuse_negative(data, found)
    judged = linearity(data, found, fraction=fraction)
    peak = peak_band(data.wavelength_nm, found.absorptivity)
    line = _line(data, found, peak)
    positive = data.concentration[data.concentration > 0]
    dye = Dye(
        name,
        data.wavelength_nm,
        found.absorptivity,
        cast(ConcentrationUnit, data.unit),
        found.independent,
        found.common,
        found.freedom,
        float(positive.min()),
        float(positive.max()),
        judged.holds_to,
        data.path_length_mm,
        molar_mass,
        found.stray_light,
        MappingProxyType(_findings(data, found, judged, line, peak)),
        data.sources + sources,
        created,
        program,
        data.notes,
    )
    return DyeFit(dye, data, found, judged, line)


def _line(data: Series, found: Fitted, peak: int) -> Line | None:
    """The plain calibration line at the peak, absorbance against concentration; None below three points."""
    used = data.usable[:, peak]
    x, y = data.concentration[data.standard][used], found.absorbance[used, peak]
    return fit_line(x, y) if len(x) >= 3 and np.ptp(x) > 0 else None


def _findings(data: Series, found: Fitted, judged: Linearity, line: Line | None, peak: int) -> dict[str, Any]:
    worst = min(judged.windows, key=lambda window: window.p, default=None)
    return {
        "linearity": {
            "fraction": judged.fraction,
            "holds_to": judged.holds_to,
            "bend_at_highest": judged.bend,
            "bend_p": judged.bend_p,
            "standards": [
                {
                    "name": name,
                    "concentration": float(c),
                    "deviation": None if np.isnan(d) else float(d),
                    "standard_uncertainty": None if np.isnan(u) else float(u),
                }
                for name, c, d, u in zip(
                    data.names, data.concentration, judged.deviation, judged.u_deviation, strict=True
                )
            ],
            "windows": [
                {"from_nm": w.low_nm, "to_nm": w.high_nm, "bend_at_highest": w.bend, "p": w.p, "rms_residual": w.rms}
                for w in judged.windows
            ],
            "worst_window_nm": None if worst is None else [worst.low_nm, worst.high_nm],
            "shape_over_noise": judged.shape,
            "associates": judged.associates,
            "shape_nm": None if np.isnan(judged.shape_nm) else judged.shape_nm,
            "photometric_noise": float(found.sigma_T[peak]),
            "concentration_error": found.sd_concentration,
            "offset_error": found.sd_offset,
            "u_stray_light": found.u_stray_light,
        },
        "calibration": None if line is None else _line_row(line, float(data.wavelength_nm[peak])),
    }


def _line_row(line: Line, peak_nm: float) -> dict[str, Any]:
    limits = {
        "decision_limit": decision_limit(line),
        "detection_limit": detection_limit(line),
        "quantification_limit": quantification_limit(line),
    }
    return {
        "wavelength_nm": peak_nm,
        "slope": line.slope,
        "s_slope": line.s_slope,
        "intercept": line.intercept,
        "s_intercept": line.s_intercept,
        "residual_standard_deviation": line.s,
        "r": line.r,
        "points": line.freedom + 2,
        "x_mean": line.x_mean,
        "y_mean": line.y_mean,
        "Sxx": line.Sxx,
        "total_weight": line.total,
        **{key: value if np.isfinite(value) else None for key, value in limits.items()},
    }


def _refuse_negative(data: Series, found: Fitted) -> None:
    u = np.sqrt(found.independent**2 + (found.common**2).sum(axis=0))
    top = found.absorptivity.max()
    # A blank that drifted by a few thousandths is common; an absorptivity this far below zero is no such thing.
    bad = (found.absorptivity < -5 * u) & (found.absorptivity < -0.05 * top)
    seen = (data.wavelength_nm >= 380) & (data.wavelength_nm <= 780)
    if top <= 0 or (bad & (seen | ~seen.any())).any():
        at = data.wavelength_nm[int(np.argmin(np.where(seen | ~seen.any(), found.absorptivity, np.inf)))]
        raise InputError(
            f"the absorptivity at {at:g} nm comes out negative",
            why="a dye cannot give light",
            do="check the blank and that concentrations belong to their readings, or fit with --intercept",
        )


def line_from(found: Mapping[str, Any]) -> Line:
    """The calibration line from the findings of a dye's file; raises InputError when it holds none."""
    try:
        points = int(found["points"])
        numbers = [float(found[key]) for key in LINE_FIELDS]
    except (KeyError, TypeError, ValueError):
        raise InputError("the dye's file holds no calibration line", do="fit the dye again") from None
    slope, intercept, s, x_mean, y_mean, Sxx, total, r = numbers
    return Line(slope, intercept, s, points - 2, x_mean, y_mean, Sxx, total, r)
