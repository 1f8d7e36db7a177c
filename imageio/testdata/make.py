"""Writes the TIFF, PNG, NPY and NPZ files of this folder with general libraries.

Made with Python 3.11.2, numpy 1.24.2, tifffile 2023.2.3, Pillow 9.4.0:  python3 make.py
Pixel (x, y) of plane p holds 20000 p + 1000 y + 13 x in 16 bits, (21 x + 7 y) mod 256 in 8.
"""
import numpy as np
import tifffile
from PIL import Image, PngImagePlugin

W, H, P = 20, 18, 3


def ramp(planes=P):
    p, y, x = np.mgrid[0:planes, 0:H, 0:W]
    return 20000 * p + 1000 * y + 13 * x


cube = ramp().astype(np.uint16)
one = cube[1]
eight = ((21 * np.mgrid[0:H, 0:W][1] + 7 * np.mgrid[0:H, 0:W][0]) % 256).astype(np.uint8)

# TIFF
plain = dict(metadata=None, datetime=False, software=False)
tifffile.imwrite("little.tif", one, byteorder="<", **plain)
tifffile.imwrite("big.tif", one, byteorder=">", **plain)
tifffile.imwrite("eight.tif", eight, **plain)
tifffile.imwrite("strips.tif", one, rowsperstrip=5, **plain)
tifffile.imwrite("tiles.tif", one, tile=(16, 16), **plain)
tifffile.imwrite("miniswhite.tif", one, photometric="miniswhite", **plain)
tifffile.imwrite("float32.tif", one.astype(np.float32), **plain)
tifffile.imwrite("signed16.tif", (one - 1000).astype(np.int16), **plain)
tifffile.imwrite("uint32.tif", one.astype(np.uint32), **plain)
tifffile.imwrite("colour.tif", np.stack([one] * 3, axis=-1), photometric="rgb", **plain)
tifffile.imwrite("bigtiff.tif", one, bigtiff=True, **plain)
with tifffile.TiffWriter("pages.tif") as t:
    for p in range(P):
        t.write(cube[p], contiguous=False, description="tof = 12.5\nscan: 3" if p == 0 else None, **plain)
with tifffile.TiffWriter("sizes.tif") as t:
    for p in range(P):
        t.write(cube[p][: H - 2 * p], contiguous=False, **plain)
with tifffile.TiffWriter("thumbnail.tif") as t:
    t.write(one, contiguous=False, **plain)
    t.write(one[::4, ::4].copy(), subfiletype=1, contiguous=False, **plain)
grey = Image.fromarray(one)
grey.save("lzw.tif", compression="tiff_lzw")
grey.save("deflate.tif", compression="tiff_adobe_deflate")
grey.save("packbits.tif", compression="packbits")
Image.fromarray(eight).save("jpeg.tif", compression="jpeg")
Image.fromarray(eight > 100).save("bilevel.tif")
# 12 bits packed: a 16-bit file whose tag 258 (BitsPerSample) is made to say 12
raw = bytearray(open("little.tif", "rb").read())
with tifffile.TiffFile("little.tif") as t:
    at = t.pages[0].tags[258].valueoffset
assert raw[at] == 16
raw[at] = 12
open("packed12.tif", "wb").write(raw)

# PNG
text = PngImagePlugin.PngInfo()
text.add_text("Comment", "tof = 7.25\nexposure = 30 us")
grey.save("grey16.png", pnginfo=text)
Image.fromarray(eight).save("grey8.png")
Image.fromarray(np.stack([eight] * 3, axis=-1)).save("colour.png")
Image.fromarray(eight).convert("P").save("palette.png")

# NPY, NPZ
types = dict(u1="|u1", i1="|i1", u2="<u2", u2big=">u2", i2="<i2", i4="<i4", u4="<u4", u8="<u8", i8=">i8", f4="<f4", f8=">f8")
for name, t in types.items():
    np.save(f"type_{name}.npy", (eight // 3 if t == "|i1" else eight if t == "|u1" else one.astype(np.int64)).astype(t))
np.save("cube.npy", cube)
np.save("fortran.npy", np.asfortranarray(cube))
np.save("last.npy", np.ascontiguousarray(np.moveaxis(cube, 0, -1)))
np.save("fiveaxes.npy", cube.reshape(1, P, 1, H, W))
np.save("nan.npy", np.where(one == one[2, 3], np.nan, one).astype(np.float32))
with open("version2.npy", "wb") as f:
    np.lib.format.write_array(f, one, version=(2, 0))
np.save("object.npy", np.array([[None, 1], [2, 3]], dtype=object))
np.save("complex.npy", one.astype(np.complex64))
np.save("half.npy", eight.astype(np.float16))
np.save("records.npy", np.zeros((4, 4), dtype=[("a", "u2"), ("b", "f4")]))
np.save("line.npy", one[0])
np.save("scalar.npy", np.float64(3))
np.savez("named.npz", light=cube[1], atoms=cube[0], dark=cube[2])
np.savez_compressed("packed.npz", cube)
