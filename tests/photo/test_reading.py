"""Photos from files: upright, linear, bounded; what cannot be read is refused in words."""

from __future__ import annotations

import io
import struct
import zlib
from contextlib import suppress

import numpy as np
import pytest
from PIL import Image, ImageCms, ImageOps

from chroma.photo.picture import srgb_table
from chroma.photo.profile import SRGB_D50, read_profile
from chroma.photo.reading import read_picture
from observers.errors import InputError


def colourful(width: int = 60, height: int = 40) -> np.ndarray:
    y, x = np.mgrid[:height, :width]
    return np.stack([x * 4 % 256, y * 6 % 256, (x + y) * 2 % 256], axis=-1).astype(np.uint8)


@pytest.fixture
def write(tmp_path):
    def inner(data: bytes, name: str = "photo.jpg") -> str:
        (tmp_path / name).write_bytes(data)
        return str(tmp_path / name)

    return inner


def encoded(codes: np.ndarray, kind: str = "JPEG", **options: object) -> bytes:
    target = io.BytesIO()
    Image.fromarray(codes).save(target, kind, **options)
    return target.getvalue()


@pytest.mark.parametrize("orientation", range(1, 9))
def test_orientation_is_obeyed(write, orientation: int) -> None:
    exif = Image.Exif()
    exif[0x0112] = orientation
    data = encoded(colourful(), "PNG", exif=exif.tobytes())
    upright = np.asarray(ImageOps.exif_transpose(Image.open(io.BytesIO(data))))
    np.testing.assert_array_equal(read_picture(write(data, "p.png")).codes, upright)


@pytest.mark.parametrize("step", [1, 2, 3, 5])
def test_a_lattice_is_the_same_from_the_library_and_from_an_array(write, step: int) -> None:
    held = read_picture(write(encoded(colourful(), "PNG"), "p.png"))
    assert not isinstance(held.pixels, np.ndarray)
    whole = held.codes[3 + step // 2 :: step, 7 + step // 2 :: step][:6, :8]
    np.testing.assert_array_equal(held.lattice(7, 3, 8, 6, step), whole)


def test_a_photo_without_a_profile_is_taken_as_srgb_and_that_is_said(write) -> None:
    found = read_picture(write(encoded(colourful(), "JPEG")))
    np.testing.assert_array_equal(found.linear, srgb_table(256))
    assert "taken as sRGB" in " ".join(found.notes)
    assert found.jpeg_steps is not None


def test_the_srgb_profile_itself_changes_next_to_nothing(write) -> None:
    profile = ImageCms.ImageCmsProfile(ImageCms.createProfile("sRGB")).tobytes()
    found = read_picture(write(encoded(colourful(), "JPEG", icc_profile=profile)))
    np.testing.assert_allclose(found.to_srgb, np.eye(3), atol=2e-3)
    np.testing.assert_allclose(found.linear, srgb_table(256), atol=5e-4)


def wide_profile(curve: bytes) -> bytes:
    """A version 2 profile made here with wider primaries (those of SMPTE EG 432-1, on D50)."""
    colorants = np.array([[0.51512, 0.29198, 0.15710], [0.24120, 0.69225, 0.06657], [-0.00105, 0.04189, 0.78407]]).T
    tags = [(name, b"XYZ \0\0\0\0" + struct.pack(">3i", *np.rint(c * 65536).astype(int)))
            for name, c in zip((b"rXYZ", b"gXYZ", b"bXYZ"), colorants, strict=True)]  # fmt: skip
    tags += [(name, curve) for name in (b"rTRC", b"gTRC", b"bTRC")]
    offset, table, body = 132 + 12 * len(tags), b"", b""
    for name, content in tags:
        table += struct.pack(">4sII", name, offset + len(body), len(content))
        body += content + b"\0" * (-len(content) % 4)
    head = bytearray(128)
    head[12:24], head[36:40] = b"mntrRGB XYZ ", b"acsp"
    return bytes(head) + struct.pack(">I", len(tags)) + table + body


SRGB_PARAMETERS = (2.4, 1 / 1.055, 0.055 / 1.055, 1 / 12.92, 0.04045)  # IEC 61966-2-1
SRGB_CURVE = b"para\0\0\0\0" + struct.pack(">Hxx5i", 3, *(round(v * 65536) for v in SRGB_PARAMETERS))
CURVES = {
    "parametric": (SRGB_CURVE, lambda x: srgb_table(256)[0]),
    "a power": (b"curv\0\0\0\0" + struct.pack(">IH", 1, round(2.2 * 256)), lambda x: x ** (round(2.2 * 256) / 256)),
    "sampled": (
        b"curv\0\0\0\0" + struct.pack(">I5H", 5, 0, 4096, 16384, 36864, 65535),
        lambda x: np.interp(x, np.linspace(0, 1, 5), np.array([0, 4096, 16384, 36864, 65535]) / 65535),
    ),
    "linear": (b"curv\0\0\0\0" + struct.pack(">I", 0), lambda x: x),
}


@pytest.mark.parametrize(("curve", "expected"), CURVES.values(), ids=CURVES.keys())
def test_a_wide_profile_becomes_a_table_and_a_matrix(write, curve: bytes, expected) -> None:
    found = read_picture(write(encoded(colourful(), "JPEG", icc_profile=wide_profile(curve))))
    np.testing.assert_allclose(found.linear[1], expected(np.linspace(0, 1, 256)), atol=2e-4)
    # White stays white; a full red of the wider space lies outside sRGB.
    np.testing.assert_allclose(found.to_srgb @ np.ones(3), 1.0, atol=2e-3)
    assert found.to_srgb[1, 0] < -0.03
    np.testing.assert_allclose(SRGB_D50 @ found.to_srgb @ np.ones(3), [0.9642, 1.0, 0.8249], atol=2e-3)


@pytest.mark.parametrize(
    "data",
    [b"x" * 200, wide_profile(b"curv\0\0\0\0" + struct.pack(">I", 9999)), wide_profile(b"????" + b"\0" * 20)],
    ids=["no profile", "a curve cut short", "a curve of no kind"],
)
def test_a_damaged_profile_is_refused(data: bytes) -> None:
    with pytest.raises(InputError, match="colour profile is damaged"):
        read_profile(data)


def test_a_profile_of_another_colour_space_is_refused(write) -> None:
    lab = bytearray(wide_profile(SRGB_CURVE))
    lab[16:20] = b"CMYK"
    with pytest.raises(InputError, match="not of RGB"):
        read_picture(write(encoded(colourful(), "JPEG", icc_profile=bytes(lab))))


@pytest.mark.parametrize(("suffix", "kind"), [(".png", "png"), (".tif", "tiff")])
def test_sixteen_bits_are_kept(write, suffix: str, kind: str) -> None:
    cv2 = pytest.importorskip("cv2")
    codes = colourful().astype(np.uint16) * 257 + 3
    done, data = cv2.imencode(suffix, codes[..., ::-1])
    assert done
    found = read_picture(write(data.tobytes(), "p" + suffix))
    np.testing.assert_array_equal(found.codes, codes)
    assert found.linear.shape == (3, 65536)


def test_heic_is_read(write) -> None:
    pillow_heif = pytest.importorskip("pillow_heif")
    target = io.BytesIO()
    pillow_heif.from_pillow(Image.fromarray(colourful(64, 64))).save(target, quality=95)
    found = read_picture(write(target.getvalue(), "p.heic"))
    assert np.abs(found.codes.astype(int) - colourful(64, 64)).mean() < 12


def test_what_the_file_says_of_the_phone_is_kept(write) -> None:
    exif = Image.Exif()
    exif[0x0110] = "Invented phone"
    exif.get_ifd(0x8769)[0xA403] = 1
    found = read_picture(write(encoded(colourful(), "JPEG", exif=exif.tobytes())))
    assert found.taken["phone"] == "Invented phone"
    assert found.taken["white_balance"] == "1"


def png_header(width: int, height: int) -> bytes:
    body = b"IHDR" + struct.pack(">IIBBBBB", width, height, 8, 2, 0, 0, 0)
    idat = zlib.compress(b"\0" * 100)
    chunks = [body, b"IDAT" + idat, b"IEND"]
    return b"\x89PNG\r\n\x1a\n" + b"".join(
        struct.pack(">I", len(c) - 4) + c + struct.pack(">I", zlib.crc32(c)) for c in chunks
    )


GREY = np.tile(np.arange(60, dtype=np.uint8), (40, 1))
BAD = {
    "empty": (b"", "no photo that can be read"),
    "text": (b"name,role\n" * 20, "no photo that can be read"),
    "truncated JPEG": (encoded(colourful(400, 300))[:6000], "is damaged"),
    "corrupted JPEG": (encoded(colourful(400, 300))[:300] + b"\xff\xc0\0\x05\x01\x02\x03" * 40, "damaged|no photo"),
    "truncated PNG": (encoded(colourful(400, 300), "PNG")[:900], "is damaged"),
    "huge": (png_header(60_000, 50_000), "too many pixels"),
    "a bomb": (png_header(12_000, 12_000), "too many pixels"),
    "long": (png_header(100_000, 10), "too many pixels"),
    "tiny": (encoded(colourful(5, 5), "PNG"), "5 × 5 pixels"),
    "grey": (encoded(GREY), "grey photo"),
    "grey in three channels": (encoded(np.repeat(GREY[..., None], 3, axis=2)), "grey photo"),
    "transparent": (
        encoded(np.dstack([colourful(), np.full((40, 60), 128, np.uint8)]), "PNG"),
        "partly transparent",
    ),
    "another kind": (encoded(colourful(), "GIF"), "no photo that can be read"),
    "no raw": (b"II*\0" + b"\0" * 500, "no camera raw file"),
    "no HEIC": (b"\0\0\0\x18ftypheic" + b"\0" * 300, "is damaged"),
}


@pytest.mark.parametrize(("data", "said"), BAD.values(), ids=BAD.keys())
def test_a_bad_photo_is_refused_in_words(write, data: bytes, said: str) -> None:
    name = {"no camera raw file": "p.dng"}.get(said, "photo.jpg")
    with pytest.raises(InputError, match=said):
        read_picture(write(data, name))


def test_cmyk_is_refused(write) -> None:
    target = io.BytesIO()
    Image.new("CMYK", (50, 50), (10, 20, 30, 40)).save(target, "JPEG")
    with pytest.raises(InputError, match="CMYK"):
        read_picture(write(target.getvalue()))


def test_a_missing_file_and_a_folder(tmp_path) -> None:
    with pytest.raises(InputError, match="cannot be read"):
        read_picture(str(tmp_path / "none.jpg"))
    with pytest.raises(InputError, match="cannot be read"):
        read_picture(str(tmp_path))


def test_broken_bytes_never_raise_anything_else(write) -> None:
    whole = bytearray(encoded(colourful(200, 150), "JPEG"))
    rng = np.random.default_rng(1)
    for number in range(60):
        data = bytearray(whole)
        for at in rng.integers(0, len(data), 12):
            data[at] = rng.integers(256)
        with suppress(InputError):
            read_picture(write(bytes(data), f"{number}.jpg"))
