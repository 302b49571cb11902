"""What one phone, lamp and cell do to a dye's colour, learned from one photo and kept in a file for the next."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from chroma.dye.model import Dye
from chroma.photo.fit import Prior, default_prior
from chroma.photo.forward import Optics
from chroma.photo.picture import Picture
from chroma.photo.solve import Solved
from chroma.spectra import Source
from observers.arrays import Array, frozen
from observers.cameras import CAMERA_NM
from observers.errors import InputError, unreadable

KIND, VERSION = "lamplit photo calibration", 1
SIZE_LIMIT = 20_000_000
COMPARED = ("maker", "phone", "lens", "white_balance", "focal_length_mm")
# What may change from one photo to the next of the same set-up, as standard deviations added to what was learned.
DRIFT_DIRECTIONS, DRIFT_VEIL, DRIFT_POWER, DRIFT_SHOULDER, DRIFT_TOE = 0.1, 0.004, 0.01, 0.02, 0.005


@dataclass(frozen=True, eq=False)
class Calibration:
    """Channels (1 + P, 3, B) of the lamp found, and what a photo told of the numbers before the unknowns.

    mean (n,) and covariance (n, n) are of camera directions, cell, stray light, tone curve and the dye's shared errors.
    """

    dye: str
    dye_sha256: str
    unit: str
    path_length_mm: float
    lamp: str
    channels: Array
    mean: Array
    covariance: Array
    highest_standard: float
    standards: int
    taken: Mapping[str, str]
    sources: tuple[Source, ...] = ()
    notes: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        for name in ("channels", "mean", "covariance"):
            object.__setattr__(self, name, frozen(getattr(self, name)))


def calibrated(picture: Picture, solved: Solved, lamps: Sequence[str], dye: Dye, path_length_mm: float) -> Calibration:
    """What a solved photo told, under the lamp that it speaks for most; raises InputError without a standard."""
    standards = solved.optics.known[(solved.optics.known > 0).any(axis=1)]
    if not len(standards):
        raise InputError(
            "no standard in the rack", why="a calibration is learned from known cuvettes", do="add one to three"
        )
    weight = solved.found.weight
    lamp = int(np.bincount(solved.found.hypotheses.lamp, weights=weight).argmax())
    share = np.where(solved.found.hypotheses.lamp == lamp, weight, 0.0)
    share = share / share.sum()
    few = solved.optics.layout.nuisance
    x = solved.found.x[:, :few]
    mean = share @ x
    apart = x - mean
    covariance = np.einsum("h,hij->ij", share, solved.found.covariance[:, :few, :few])
    covariance = covariance + np.einsum("h,hi,hj->ij", share, apart, apart)
    return Calibration(
        dye.name,
        dye.sources[0].sha256 if dye.sources else "",
        dye.unit,
        path_length_mm,
        lamps[lamp],
        solved.optics.channels[lamp],
        mean,
        covariance,
        float(standards.max()),
        len(standards),
        dict(picture.taken),
        (picture.source, *dye.sources[:1]),
    )


def carried(calibration: Calibration, optics: Optics) -> Prior:
    """The prior of a later photo: what was learned, with room for drift; the cell against the panel is learned anew."""
    layout = optics.layout
    if len(calibration.mean) != layout.nuisance:
        raise InputError("the calibration does not fit this dye", why="the dye's file has other shared errors")
    believed = default_prior(optics)
    drift = np.zeros(layout.nuisance)
    drift[: layout.directions] = DRIFT_DIRECTIONS
    for at, size in (
        (layout.veil, DRIFT_VEIL),
        (layout.power, DRIFT_POWER),
        (layout.shoulder, DRIFT_SHOULDER),
        (layout.toe, DRIFT_TOE),
    ):
        drift[at] = size
    covariance = calibration.covariance + np.diag(drift**2)
    covariance[layout.cell] = covariance[:, layout.cell] = 0.0
    covariance[layout.cell, layout.cell] = np.linalg.inv(believed.precision[layout.cell, layout.cell])
    mean, precision = believed.mean.copy(), believed.precision.copy()
    keep = np.ones(layout.nuisance, dtype=bool)
    keep[layout.cell] = False
    mean[: layout.nuisance][keep] = calibration.mean[keep]
    precision[: layout.nuisance, : layout.nuisance] = np.linalg.inv(covariance)
    return Prior(mean, precision)


def differences(
    calibration: Calibration, picture: Picture, dyes: Sequence[Dye], path_length_mm: float
) -> tuple[str, ...]:
    """Warnings where a photo was not taken as the calibration's was; raises InputError for another dye or path."""
    if len(dyes) != 1 or dyes[0].name != calibration.dye or dyes[0].unit != calibration.unit:
        raise InputError(
            f"the calibration is for {calibration.dye} in {calibration.unit}",
            why=f"the estimate is of {', '.join(dye.name for dye in dyes)} in {dyes[0].unit}",
            do="calibrate with this dye",
        )
    if abs(path_length_mm / calibration.path_length_mm - 1) > 1e-6:
        raise InputError(
            f"the calibration is for a path of {calibration.path_length_mm:g} mm",
            why=f"the estimate says {path_length_mm:g} mm",
            do="use the same cells, or calibrate anew",
        )
    own = dyes[0].sources[0].sha256 if dyes[0].sources else ""
    warnings = []
    if own and calibration.dye_sha256 and own != calibration.dye_sha256:
        warnings.append("warning: the dye's file is not the one that was calibrated with")
    for key in COMPARED:
        then, now = calibration.taken.get(key), picture.taken.get(key)
        if then != now:
            words = key.replace("_", " ")
            warnings.append(
                f"warning: {words} was {then or 'not stated'} in the calibration, is {now or 'not stated'} here"
            )
    if not calibration.taken and not picture.taken:
        warnings.append("warning: neither photo says with what it was taken; the calibration holds for one phone only")
    return tuple(warnings)


def calibration_text(calibration: Calibration, program: str = "") -> str:
    """The file's text: one line a field."""
    content: dict[str, Any] = {
        "kind": KIND,
        "version": VERSION,
        "holds_for": "one phone, its lens and white balance, one lamp, one kind of cell, one dye",
        "dye": calibration.dye,
        "dye_sha256": calibration.dye_sha256,
        "unit": calibration.unit,
        "path_length_mm": calibration.path_length_mm,
        "lamp": calibration.lamp,
        "taken": dict(calibration.taken),
        "standards": calibration.standards,
        "highest_standard": calibration.highest_standard,
        "wavelength_nm": CAMERA_NM.tolist(),
        "channels": np.round(calibration.channels, 9).tolist(),
        "mean": calibration.mean.tolist(),
        "covariance": calibration.covariance.tolist(),
        "sources": [{"path": source.path, "sha256": source.sha256} for source in calibration.sources],
        "notes": list(calibration.notes),
        "program": program,
    }
    rows = (f"  {json.dumps(key)}: {json.dumps(value, ensure_ascii=False)}" for key, value in content.items())
    return "{\n" + ",\n".join(rows) + "\n}\n"


def read_calibration(path: str) -> Calibration:
    """A calibration from its file; raises InputError naming the file when it is none, or is damaged."""
    try:
        data = Path(path).read_bytes()
        if len(data) > SIZE_LIMIT:
            raise InputError("is too large for a calibration", why=f"{len(data)} bytes")
        content = json.loads(data.decode("utf-8"))
    except OSError as error:
        raise unreadable(path, error) from None
    except (UnicodeDecodeError, json.JSONDecodeError, RecursionError) as error:
        raise InputError("is no calibration", where=path, why=f"it is not JSON ({error})") from None
    except InputError as error:
        raise error.at(path) from None
    try:
        return _from(content, Source(path, hashlib.sha256(data).hexdigest()))
    except InputError as error:
        raise error.at(path) from None
    except (KeyError, TypeError, ValueError) as error:
        raise InputError(
            "is damaged", where=path, why=f"{type(error).__name__}: {error}", do="calibrate anew"
        ) from None


def _from(content: Any, source: Source) -> Calibration:
    if not isinstance(content, dict) or content.get("kind") != KIND:
        raise InputError(
            "is no calibration", why=f'it does not say "kind": "{KIND}"', do="make one with lamplit photo calibrate"
        )
    if content.get("version") != VERSION:
        raise InputError(f"is of version {content.get('version')!r}", why=f"this program reads version {VERSION}")
    channels = np.array(content["channels"], dtype=np.float64)
    mean, covariance = np.array(content["mean"], dtype=np.float64), np.array(content["covariance"], dtype=np.float64)
    if channels.ndim != 3 or channels.shape[1:] != (3, len(CAMERA_NM)) or not np.isfinite(channels).all():
        raise ValueError("channels are not of this program's grid")
    if mean.ndim != 1 or covariance.shape != (len(mean), len(mean)) or not np.isfinite(covariance).all():
        raise ValueError("mean and covariance do not agree")
    if not np.isfinite(mean).all() or np.linalg.eigvalsh(covariance).min() <= 0:
        raise ValueError("the covariance is none")
    path_length_mm, highest = float(content["path_length_mm"]), float(content["highest_standard"])
    return Calibration(
        str(content["dye"]),
        str(content["dye_sha256"]),
        str(content["unit"]),
        path_length_mm,
        str(content["lamp"]),
        channels,
        mean,
        covariance,
        highest,
        int(content["standards"]),
        {str(key): str(value) for key, value in content["taken"].items()},
        (source,),
        tuple(str(note) for note in content.get("notes", ())),
    )
