"""Writes the FITS files of this folder with another implementation.

Made with Python 3.11.2, astropy 5.2.1, numpy 1.24.2:  python3 make.py
Pixel (x, y) of plane p of a ramp holds 1000 p + 37 y + 11 x.
"""
import gzip
import numpy as np
from astropy.io import fits

W, H, P = 7, 5, 3


def ramp(planes=P, start=0, step=1):
    p, y, x = np.mgrid[0:planes, 0:H, 0:W]
    return start + step * (1000 * p + 37 * y + 11 * x)


def save(name, *units, **options):
    fits.HDUList(list(units)).writeto(name, overwrite=True, **options)


def primary(data, **cards):
    hdu = fits.PrimaryHDU(data)
    for k, v in cards.items():
        hdu.header[k] = v
    return hdu


# counts on both sides of 32768, so that a wrong sign shows
save("unsigned16.fits", primary(ramp(start=31000).astype(np.uint16), TOF=(28.0, "ms"), SHOT=12))
save("signed16.fits", primary((ramp() - 1500).astype(np.int16)))
save("unsigned8.fits", primary((ramp() % 256).astype(np.uint8)))
save("signed8.fits", primary((ramp() % 256 - 128).astype(np.int8)))
save("signed32.fits", primary((ramp() * 100000 - 100000000).astype(np.int32)))
save("unsigned32.fits", primary((ramp().astype(np.uint64) * 1000000 + 2000000000).astype(np.uint32)))
save("signed64.fits", primary(ramp().astype(np.int64) * 10000000000))
save("float64.fits", primary(ramp().astype(np.float64) / 8))

f = ramp().astype(np.float32) / 4
f[0, 0, 0], f[1, 2, 3], f[2, 4, 6] = np.nan, np.inf, -np.inf
save("float32.fits", primary(f))

# physical = 100 + 0.25 stored; stored -32768 is blank
s = fits.PrimaryHDU((ramp() - 1000).astype(np.int16))
s.data[1, 1, 1] = -32768
s.header["BSCALE"], s.header["BZERO"], s.header["BLANK"] = 0.25, 100.0, -32768
s.writeto("scaled16.fits", overwrite=True)
with fits.open("scaled16.fits", do_not_scale_image_data=True) as h:
    assert h[0].header["BSCALE"] == 0.25 and h[0].data[0, 0, 0] == -1000  # written as meant, not applied

long = primary(ramp().astype(np.uint16))
long.header["OBSERVER"] = ("it's 5 o'clock / tea", "quotes doubled, a slash inside")
long.header["LONG"] = "".join(f"{i:03d} " for i in range(60)).strip()
long.header["HIERARCH camera sensor temperature"] = -61.25
long.header["HIERARCH ESO DET EXPTIME"] = (1e-05, "s")
long.header["EMPTY"] = fits.card.UNDEFINED
long.header["FLAG"] = True
long.header["CPLX"] = 1 + 2j
long.header["COMMENT"] = "first line"
long.header["COMMENT"] = "second line"
long.header["HISTORY"] = "made for a test"
for i in range(300):
    long.header[f"KEY{i:04d}"] = (i * 0.5, "one of many")
save("longheader.fits", long)

names = ["ATOMS", "LIGHT", "DARK"]
units = [fits.PrimaryHDU()]
for p, name in enumerate(names):
    units.append(fits.ImageHDU(ramp()[p].astype(np.uint16), name=name))
units.append(fits.BinTableHDU.from_columns([fits.Column("t", "D", array=np.arange(4.0))], name="CLOCK"))
units[0].header["TOF"] = 15.5
save("extensions.fits", *units)

save("fouraxes.fits", primary(ramp().astype(np.uint16).reshape(P, 1, H, W)))
save("density.fits", primary(ramp(1)[0].astype(np.float32) / 100))
save("oneaxis.fits", primary(np.arange(10, dtype=np.int16)))
save("table.fits", fits.PrimaryHDU(), units[-1].copy())
save("compressed.fits", fits.PrimaryHDU(), fits.CompImageHDU(ramp(1)[0].astype(np.int16), compression_type="RICE_1"))

groups = fits.GroupData(np.arange(24, dtype=np.float32).reshape(2, 1, 1, 3, 4), parnames=["U"], pardata=[np.zeros(2)], bitpix=-32)
save("groups.fits", fits.GroupsHDU(groups))

whole = open("unsigned16.fits", "rb").read()
open("trailing.fits", "wb").write(whole + b"camera log: all is well\n")
data = 2 * W * H * P
header = len(whole) - 2880
open("nopadding.fits", "wb").write(whole[: header + data])
open("unsigned16.fits.gz", "wb").write(gzip.compress(whole, mtime=0))
