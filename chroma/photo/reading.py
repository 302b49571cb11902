"""Photos from files: JPEG, PNG, TIFF, and as extras HEIC and camera raw; always upright, always bounded."""

from __future__ import annotations

import hashlib
import io
import warnings
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import numpy as np

from chroma.photo.picture import CodeArray, Picture, srgb_table
from chroma.photo.profile import Profile, read_profile
from chroma.spectra import Source
from observers.errors import InputError

FILE_LIMIT = 300_000_000  # bytes
PIXEL_LIMIT = 80_000_000
SIDE_LIMIT, SMALLEST_SIDE = 30_000, 8
FORMATS = ("JPEG", "PNG", "TIFF")
RAW_SUFFIXES = (".dng", ".nef", ".cr2", ".cr3", ".arw", ".raf", ".orf", ".rw2", ".pef", ".srw")
HEIF_BRANDS = (b"heic", b"heix", b"hevc", b"mif1", b"msf1", b"heim", b"heis")
# Tags of EXIF 2.32 (CIPA DC-008) that say how a photo was taken.
TAGS = {0x010F: "maker", 0x0110: "phone", 0x0131: "software", 0x0132: "date"}
SUB_TAGS = {
    0x829A: "exposure_s", 0x829D: "aperture", 0x8827: "iso", 0x920A: "focal_length_mm", 0xA402: "exposure_mode",
    0xA403: "white_balance", 0xA434: "lens", 0xA404: "digital_zoom",
}  # fmt: skip
EXIF_IFD, ORIENTATION = 0x8769, 0x0112


def read_picture(path: str) -> Picture:
    """A photo as upright codes with what carries them to linear sRGB.

    Raises InputError, naming the file, when it cannot be read, is truncated or too large, is of no known format, is
    grey, or needs an extra that is not installed.
    """
    try:
        data = _bytes(path)
        source = Source(path, hashlib.sha256(data).hexdigest())
        if data[4:8] == b"ftyp" and data[8:12] in HEIF_BRANDS:
            return _heif(data, source)
        if Path(path).suffix.lower() in RAW_SUFFIXES:
            return _raw(data, source)
        return _ordinary(data, source)
    except InputError as error:
        raise error.at(path) from None


def _bytes(path: str) -> bytes:
    try:
        size = Path(path).stat().st_size
        if size > FILE_LIMIT:
            raise InputError("is too large for a photo", why=f"{size} bytes, at most {FILE_LIMIT} are read")
        return Path(path).read_bytes()
    except OSError as error:
        raise InputError("cannot be read", why=error.strerror or "", do="check the name") from None


def _ordinary(data: bytes, source: Source) -> Picture:
    from PIL import Image, UnidentifiedImageError

    with warnings.catch_warnings():
        warnings.simplefilter("error", Image.DecompressionBombWarning)
        warnings.simplefilter("ignore", UserWarning)  # of metadata that cannot be read, and is not needed
        try:
            with Image.open(io.BytesIO(data), formats=FORMATS) as picture:
                _judge_size(*picture.size)
                return _decoded(picture, data, source)
        except (Image.DecompressionBombError, Image.DecompressionBombWarning):
            raise _too_many() from None
        except UnidentifiedImageError:
            raise InputError(
                "is no photo that can be read", why="JPEG, PNG and TIFF are, HEIC and camera raw as extras"
            ) from None
        except InputError:
            raise
        # Decoders raise whatever the broken part of a file leads them to.
        except (OSError, SyntaxError, ValueError, EOFError, IndexError, KeyError, TypeError, OverflowError) as error:
            raise InputError("is damaged", why=str(error) or type(error).__name__, do="copy the photo again") from None


def _decoded(picture: Any, data: bytes, source: Source) -> Picture:
    exif = picture.getexif()
    orientation = int(exif.get(ORIENTATION, 1) or 1)
    notes: list[str] = []
    pixels = _sixteen_bit(data) if _deep(picture, data) else _eight_bit(picture, notes)
    deep = isinstance(pixels, np.ndarray) and pixels.dtype == np.uint16
    profile = read_profile(picture.info.get("icc_profile"), deep)
    pixels = _profiled(pixels, picture, profile, notes)
    if orientation != 1:
        pixels = upright(np.asarray(pixels), orientation)
    table = profile.linear if profile.linear is not None else srgb_table(65536 if deep else 256)
    notes.extend(profile.notes)
    found = Picture(pixels, table, profile.to_srgb, source, tuple(notes), taken(exif), _jpeg_steps(picture))
    _judge_colour(found)
    return found


def _profiled(pixels: Any, picture: Any, profile: Profile, notes: list[str]) -> Any:
    """Codes as they are where the profile is a matrix with curves; else converted to sRGB by the colour library."""
    if not profile.by_library:
        return pixels
    from PIL import Image, ImageCms

    if isinstance(pixels, np.ndarray) and pixels.dtype != np.uint8:
        raise InputError("a 16-bit picture with a colour profile of tables", do="save it in sRGB")
    try:
        own = ImageCms.ImageCmsProfile(io.BytesIO(picture.info["icc_profile"]))
        plain = Image.fromarray(pixels) if isinstance(pixels, np.ndarray) else pixels
        changed = ImageCms.profileToProfile(plain, own, ImageCms.createProfile("sRGB"))
    except (ImageCms.PyCMSError, OSError) as error:
        raise InputError("its colour profile cannot be used", why=str(error), do="save it in sRGB") from None
    notes.append("colour profile of tables: converted to sRGB at 8 bits")
    return changed


def _eight_bit(picture: Any, notes: list[str]) -> Any:
    """The picture in 8-bit RGB, of the imaging library or as an array; raises InputError for what is not RGB."""
    picture.load()
    mode = picture.mode
    if mode in ("1", "L", "LA", "I", "F", "I;16", "I;16B", "I;16L"):
        raise _grey()
    if mode == "RGB":
        return picture
    if mode in ("RGBA", "P", "RGBX"):
        if mode == "RGBA" or "transparency" in picture.info:
            full = np.asarray(picture.convert("RGBA"))
            if (full[..., 3] < 255).any():
                raise InputError("is partly transparent", why="what shows through is not known", do="save it opaque")
            return full[..., :3]
        notes.append(
            "a palette was laid on this picture: colours are coarse" if mode == "P" else "a fourth channel left out"
        )
        return picture.convert("RGB")
    raise InputError(f"is a picture in {mode}", why="red, green and blue are needed", do="save it as RGB")


def _deep(picture: Any, data: bytes) -> bool:
    """Whether the file holds three channels of 16 bits, which the imaging library would cut to 8."""
    if picture.format == "PNG":
        return data[24:25] == b"\x10" and data[25:26] in (b"\x02", b"\x06")
    if picture.format == "TIFF":
        bits = picture.tag_v2.get(258, ())
        return bool(bits) and isinstance(bits, tuple) and len(bits) >= 3 and set(bits) == {16}
    return False


def _sixteen_bit(data: bytes) -> CodeArray:
    try:
        import cv2
    except ImportError:
        raise InputError("holds 16 bits a channel", do="pip install 'lamplit[photo]' to read it") from None
    codes = cv2.imdecode(np.frombuffer(data, np.uint8), cv2.IMREAD_UNCHANGED)
    if codes is None or codes.ndim != 3 or codes.dtype != np.uint16:
        raise InputError("is damaged", why="its 16-bit channels cannot be decoded", do="copy the photo again")
    if codes.shape[2] == 4 and (codes[..., 3] < 65535).any():
        raise InputError("is partly transparent", why="what shows through is not known", do="save it opaque")
    result: CodeArray = np.asarray(codes, dtype=np.uint16)[..., 2::-1]
    return result


def _jpeg_steps(picture: Any) -> tuple[float, float] | None:
    tables = getattr(picture, "quantization", None)
    if picture.format not in ("JPEG", "MPO") or not tables:
        return None
    luma, chroma = tables[min(tables)], tables[max(tables)]
    return float(luma[0]), float(chroma[0])


def _heif(data: bytes, source: Source) -> Picture:
    try:
        import pillow_heif
    except ImportError:
        raise InputError("is a HEIC photo", do="pip install 'lamplit[heic]' to read it") from None
    from PIL import Image

    try:
        opened = pillow_heif.open_heif(io.BytesIO(data))
        _judge_size(*opened.size)
        plain = opened.to_pillow()
        info = dict(opened.info)
    except InputError:
        raise
    except Exception as error:  # the library states no family of errors
        raise InputError("is damaged", why=str(error), do="copy the photo again") from None
    pixels = _eight_bit(plain, [])
    profile = read_profile(info.get("icc_profile"), False)
    if profile.by_library:
        raise InputError("its colour profile is of tables", do="save it as JPEG in sRGB")
    exif = Image.Exif()
    if info.get("exif"):
        exif.load(info["exif"])
    table = profile.linear if profile.linear is not None else srgb_table(256)
    # The library turns the picture upright itself; its coding rounds much as JPEG of good quality does.
    found = Picture(pixels, table, profile.to_srgb, source, profile.notes, taken(exif), (2.0, 2.0))
    _judge_colour(found)
    return found


def _raw(data: bytes, source: Source) -> Picture:
    try:
        import rawpy
    except ImportError:
        raise InputError("is a camera raw file", do="pip install 'lamplit[raw]' to read it") from None
    try:
        with rawpy.imread(io.BytesIO(data)) as opened:
            _judge_size(opened.sizes.width, opened.sizes.height)
            codes = opened.postprocess(
                gamma=(1, 1),
                no_auto_bright=True,
                use_camera_wb=True,
                output_bps=16,
                output_color=rawpy.ColorSpace.sRGB,
            )
    except rawpy.LibRawError as error:
        raise InputError("is no camera raw file that can be read", why=str(error), do="save it as TIFF") from None
    linear = np.tile(np.arange(65536) / 65535.0, (3, 1))
    note = "camera raw: developed linearly to sRGB with the white balance it was taken with"
    return Picture(codes, linear, np.eye(3), source, (note,), {}, None, linear_file=True)


def upright(codes: CodeArray, orientation: int) -> CodeArray:
    """The picture turned and mirrored as EXIF's orientation (1–8) says; a view, nothing is copied."""
    if orientation in (5, 6, 7, 8):
        codes = codes.swapaxes(0, 1)
    if orientation in (3, 4, 7, 8):
        codes = codes[::-1]
    if orientation in (2, 3, 6, 7):
        codes = codes[:, ::-1]
    return codes


def taken(exif: Any) -> Mapping[str, str]:
    """What a file says of phone, lens, exposure and white balance."""
    found = {name: exif.get(tag) for tag, name in TAGS.items()}
    below = exif.get_ifd(EXIF_IFD)
    found |= {name: below.get(tag) for tag, name in SUB_TAGS.items()}
    return {name: str(value).strip("\x00 ")[:200] for name, value in found.items() if value is not None}


def _judge_size(width: int, height: int) -> None:
    if min(width, height) < SMALLEST_SIDE:
        raise InputError(f"a picture of {width} × {height} pixels", why="that is no photo of cuvettes")
    if width * height > PIXEL_LIMIT or max(width, height) > SIDE_LIMIT:
        raise _too_many()


def _too_many() -> InputError:
    return InputError(
        "holds too many pixels",
        why=f"at most {PIXEL_LIMIT // 1_000_000} megapixels are read",
        do="take a smaller photo",
    )


def _judge_colour(picture: Picture) -> None:
    """Raises InputError for a picture that is grey all over."""
    step = max(1, min(picture.width, picture.height) // 200)
    some = picture.lattice(0, 0, picture.width // step, picture.height // step, step).astype(np.int32)
    if np.ptp(some, axis=-1).max() <= (1 if picture.top_code == 255 else 257):
        raise _grey()


def _grey() -> InputError:
    return InputError("is a grey photo", why="concentration is read from colour", do="take a colour photo")
