"""Writes small FITS files with astropy and, beside them, what astropy reads back in them.

Run in this folder: python3 make.py (astropy 8.0.2, numpy). Fluxes are plain made-up numbers; what is
checked is reading, so the wavelengths of expected.csv come from astropy.wcs (images) or
astropy.io.fits and astropy.units (tables), never from the program under test.
"""
import csv
import gzip
import json
import warnings

import astropy.units as u
import numpy as np
from astropy.io import fits
from astropy.wcs import WCS

warnings.simplefilter("ignore")
N = 40
RNG = np.random.default_rng(4)
FLUX = 1.0 + RNG.random(N)
SIGMA = 0.05 + 0.02 * RNG.random(N)
CGS = "erg/s/cm2/Angstrom"
rows, cases = [], {}


def case(name, wave_aa, flux, sigma=None, bad=None, flux_unit=CGS, **layout):
    """One expected spectrum: wavelengths in Angstrom in the medium of the file, flux in its unit."""
    file = layout.pop("file", name + ".fits")
    order = np.argsort(wave_aa)
    for i in order:
        s = "" if sigma is None else repr(float(sigma[i]))
        b = 0 if bad is None else int(bad[i])
        rows.append([name, repr(float(wave_aa[i])), repr(float(flux[i])), s, b])
    cases[name] = {"file": file, "unit": flux_unit, **layout}


def image(name, cards, data=FLUX, extra=(), medium="vacuum", sigma=None, bad=None, unit=CGS,
          scale=None, bunit=CGS, flux=None, suffix="", **layout):
    hdu = fits.PrimaryHDU(np.asarray(data))
    if bunit:
        hdu.header["BUNIT"] = bunit
    for key, value in cards.items():
        hdu.header[key] = value
    hdus = fits.HDUList([hdu, *extra])
    file = name + ".fits" + suffix
    hdus.writeto(file, overwrite=True)
    with fits.open(file) as back:
        if flux is None:
            flux = back[0].data.astype(float).reshape(-1)
        if scale is None:
            wcs = WCS(back[0].header, back)
            axis = wcs.wcs.spec if wcs.wcs.spec >= 0 else 0
            pixels = np.zeros((N, wcs.naxis))
            pixels[:, axis] = np.arange(N)
            world = wcs.all_pix2world(pixels, 0)[:, axis] * u.Unit(wcs.wcs.cunit[axis])
            scale = world.to_value(u.AA, u.spectral())
    case(name, scale, flux, sigma, bad, unit, file=file, medium=medium, **layout)


lin = {"CRVAL1": 4000.0, "CRPIX1": 3.0, "CDELT1": 1.25}
image("lin_wave", {"CTYPE1": "WAVE", "CUNIT1": "Angstrom", **lin})
image("lin_awav", {"CTYPE1": "AWAV", "CUNIT1": "nm", "CRVAL1": 400.0, "CRPIX1": 1.0, "CDELT1": 0.1},
      medium="air")
image("metre", {"CTYPE1": "WAVE", "CRVAL1": 4e-7, "CRPIX1": 1.0, "CDELT1": 1e-10})
image("freq", {"CTYPE1": "FREQ", "CUNIT1": "GHz", "CRVAL1": 600000.0, "CRPIX1": 1.0, "CDELT1": 40.0},
      bunit="Jy", unit="Jy")
image("wavn", {"CTYPE1": "WAVN", "CUNIT1": "cm-1", "CRVAL1": 3000.0, "CRPIX1": 1.0, "CDELT1": 0.5},
      bunit="mJy", unit="mJy")
image("cd", {"CTYPE1": "WAVE", "CUNIT1": "um", "CRVAL1": 2.9, "CRPIX1": 1.0, "CD1_1": 0.002})
image("pc", {"CTYPE1": "WAVE", "CUNIT1": "um", "CRVAL1": 2.9, "CRPIX1": 1.0, "CDELT1": 0.001,
             "PC1_1": 2.0})
image("wave_log", {"CTYPE1": "WAVE-LOG", "CUNIT1": "Angstrom", **lin})
image("awav_log", {"CTYPE1": "AWAV-LOG", "CUNIT1": "nm", "CRVAL1": 700.0, "CRPIX1": 20.0,
                   "CDELT1": 0.8}, medium="air")
image("freq_log", {"CTYPE1": "FREQ-LOG", "CUNIT1": "Hz", "CRVAL1": 5e14, "CRPIX1": 2.0,
                   "CDELT1": 1e11}, bunit="Jy", unit="Jy")
p = np.arange(1, N + 1)
image("legacy_linear", {"CTYPE1": "LINEAR", **lin}, scale=4000.0 + (p - 3.0) * 1.25, medium="air",
      say_unit="Angstrom", say_medium="air")
image("legacy_wat", {"CTYPE1": "LINEAR", "WAT1_001": "wtype=linear label=Wavelength units=angstroms",
                     "AIRORVAC": "air", **lin}, scale=4000.0 + (p - 3.0) * 1.25, medium="air")
image("dc_flag", {"CTYPE1": "LINEAR", "CUNIT1": "Angstrom", "DC-FLAG": 1, "VACUUM": True,
                  "CRVAL1": 3.6, "CRPIX1": 1.0, "CD1_1": 1e-4}, scale=10 ** (3.6 + (p - 1) * 1e-4))

scaled = fits.PrimaryHDU(np.arange(1, N + 1, dtype=np.int16))
stored = np.arange(1, N + 1, dtype=np.int16)
stored[7] = -32768
raw = fits.PrimaryHDU(stored)
raw.header.update({"BSCALE": 2.5e-17, "BZERO": 1e-15, "BLANK": -32768, "BUNIT": CGS, "CTYPE1": "WAVE",
                   "CUNIT1": "Angstrom", **lin})
raw.writeto("scaled.fits", overwrite=True, output_verify="ignore")
with open("scaled.fits", "r+b") as f:  # the stored integers, which astropy has rescaled on writing
    head = fits.Header.fromfile(f)
    for key, value in (("BITPIX", 16), ("BSCALE", 2.5e-17), ("BZERO", 1e-15), ("BLANK", -32768)):
        head[key] = value
    data = stored.astype(">i2").tobytes()
    f.seek(0)
    f.truncate()
    f.write(head.tostring().encode() + data + b"\0" * (-len(data) % 2880))
with fits.open("scaled.fits") as back:
    w = WCS(back[0].header).all_pix2world(np.arange(N), 0)[0] * 1e10
    case("scaled", w, back[0].data.astype(float), medium="vacuum")

nan = FLUX.copy()
nan[3] = np.nan
image("nan_gz", {"CTYPE1": "WAVE", "CUNIT1": "Angstrom", **lin}, data=nan.astype("f4"), suffix=".gz")


def ext(name, data, **cards):
    hdu = fits.ImageHDU(np.asarray(data), name=name)
    for key, value in cards.items():
        hdu.header[key] = value
    return hdu


wave = {"CTYPE1": "WAVE", "CUNIT1": "Angstrom", **lin}
dq = np.zeros(N, dtype=np.int16)
dq[5], dq[9] = 4, 1
image("err_dq", wave, extra=[ext("ERR", SIGMA, BUNIT=CGS), ext("DQ", dq)], sigma=SIGMA, bad=dq != 0)
image("stat", wave, extra=[ext("STAT", SIGMA**2, BUNIT=f"({CGS})**2")], sigma=SIGMA)
ivar = SIGMA**-2.0
ivar[2] = 0
off = np.zeros(N, bool)
off[2] = True
image("ivar", wave, extra=[ext("IVAR", ivar)], sigma=SIGMA, bad=off)
image("hduclas", {**wave, "ERRDATA": "NOISE", "QUALDATA": "PIXELS"},
      extra=[ext("NOISE", SIGMA**2, HDUCLAS1="IMAGE", HDUCLAS2="ERROR", HDUCLAS3="MSE"),
             ext("PIXELS", dq, HDUCLAS1="IMAGE", HDUCLAS2="QUALITY")], sigma=SIGMA, bad=dq != 0)
image("row_of_2d", {**wave, "CTYPE2": "LINEAR"}, data=np.vstack([FLUX, 2 * FLUX, 3 * FLUX]),
      flux=2 * FLUX, scale=4000.0 + (p - 3.0) * 1.25, row=2)
image("cube_1_1_n", {"CTYPE1": "RA---TAN", "CTYPE2": "DEC--TAN", "CTYPE3": "WAVE", "CUNIT1": "deg",
                     "CUNIT2": "deg", "CUNIT3": "Angstrom", "CRVAL3": 6000.0, "CRPIX3": 1.0,
                     "CDELT3": 2.0, "CDELT1": 1e-4, "CDELT2": 1e-4}, data=FLUX.reshape(N, 1, 1))

coords = 3.0 + np.cumsum(0.001 + 0.001 * RNG.random(N))
tab = fits.BinTableHDU.from_columns(
    [fits.Column("COORD", f"{N}D", dim=f"(1,{N})", unit="um", array=coords.reshape(1, N, 1))],
    name="WCS-TABLE")
tabbed = {"CTYPE1": "WAVE-TAB", "CUNIT1": "um", "PS1_0": "WCS-TABLE", "PS1_1": "COORD", "CRVAL1": 1.0,
          "CRPIX1": 1.0, "CDELT1": 1.0}
image("wave_tab", tabbed, extra=[tab])
few = np.array([3.0, 3.05, 3.2])
index = np.array([1.0, 11.0, 40.0])
tab2 = fits.BinTableHDU.from_columns(
    [fits.Column("COORD", "3D", dim="(1,3)", unit="um", array=few.reshape(1, 3, 1)),
     fits.Column("INDEX", "3D", array=index.reshape(1, 3))], name="WCS-TABLE")
image("wave_tab_index", {**tabbed, "PS1_2": "INDEX"}, extra=[tab2])


def table(name, columns, primary=None, header=None, extname="SPECTRUM", **expected):
    hdu = fits.BinTableHDU.from_columns([fits.Column(*c[:2], array=c[2], unit=c[3]) for c in columns],
                                        name=extname)
    for key, value in (header or {}).items():
        hdu.header[key] = value
    first = fits.PrimaryHDU()
    for key, value in (primary or {}).items():
        first.header[key] = value
    fits.HDUList([first, hdu]).writeto(name + ".fits", overwrite=True)
    with fits.open(name + ".fits") as back:
        data = back[1].data
        wave_name, flux_name = expected.pop("use")
        pick = expected.pop("pick", None)
        w = np.asarray(data[wave_name] if pick is None else data[wave_name][pick], dtype=float)
        f = np.asarray(data[flux_name] if pick is None else data[flux_name][pick], dtype=float)
        wave_unit = expected.pop("wave_unit", None) or back[1].columns[wave_name].unit
        w = 10**w if wave_unit == "log10" else (w * u.Unit(wave_unit)).to_value(u.AA, u.spectral())
    case(name, w, f, expected.pop("sigma", None), expected.pop("bad", None),
         expected.pop("unit", CGS), **expected)


W = 5000.0 + np.cumsum(0.5 + RNG.random(N))
table("rows", [("Wavelength", "D", W, "Angstrom"), ("Flux", "E", FLUX, CGS), ("Error", "E", SIGMA, CGS),
               ("Quality", "J", dq, None)], header={"AIRORVAC": "vac"}, use=("Wavelength", "Flux"),
      sigma=SIGMA, bad=dq != 0, medium="vacuum")
and_mask = np.zeros(N, dtype=np.int32)
and_mask[4] = 1 << 24
table("loglam", [("flux", "E", FLUX, None), ("loglam", "D", np.log10(W), None), ("ivar", "E", ivar, None),
                 ("and_mask", "J", and_mask, None)], primary={"VACUUM": True, "BUNIT": "1E-17 erg/cm^2/s/Ang"},
      use=("loglam", "flux"), wave_unit="log10", unit="1E-17 erg/s/cm2/Angstrom", sigma=SIGMA,
      bad=off | (and_mask != 0), medium="vacuum")
one = lambda a: np.asarray(a).reshape(1, N)
table("vector", [("WAVE", f"{N}E", one(W / 10), "nm"), ("FLUX", f"{N}E", one(FLUX), "erg s**(-1) cm**(-2) nm**(-1)"),
                 ("ERR", f"{N}E", one(SIGMA), "erg s**(-1) cm**(-2) nm**(-1)")],
      header={"VOCLASS": "SPECTRUM V2.0"}, use=("WAVE", "FLUX"), pick=0,
      unit="erg/s/cm2/nm", sigma=SIGMA, say_medium="vacuum", medium="vacuum")
tutyp = {"TUTYP1": "Spectrum.Data.FluxAxis.Value", "TUTYP2": "spec:Data.SpectralAxis.Value",
         "TUTYP3": "spec:Data.FluxAxis.Accuracy.StatError", "TUTYP4": "eso:Data.FluxAxis.Value"}
table("utype", [("a", f"{N}D", one(FLUX), CGS), ("b", f"{N}D", one(W), "Angstrom"),
                ("c", f"{N}D", one(SIGMA), CGS), ("d", f"{N}D", one(FLUX * 9), CGS)],
      header=tutyp, use=("b", "a"), pick=0, sigma=SIGMA, say_medium="vacuum", medium="vacuum")
tucd = {"TUCD1": "em.wl;obs.atmos", "TUCD2": "phot.flux.density;em.wl", "TUCD3": "stat.error;phot.flux.density",
        "TUCD4": "meta.code.qual"}
table("ucd", [("x", "D", W, "Angstrom"), ("y", "D", FLUX, CGS), ("z", "D", SIGMA, CGS), ("q", "I", dq, None)],
      header=tucd, use=("x", "y"), sigma=SIGMA, bad=dq != 0, medium="air")
two = lambda a: np.vstack([np.asarray(a) * 2, np.asarray(a)])
table("many", [("WAVE", f"{N}D", two(W), "Angstrom"), ("FLUX", f"{N}D", two(FLUX), CGS),
               ("SIGMA", f"{N}D", two(SIGMA), CGS)], use=("WAVE", "FLUX"), pick=1, sigma=SIGMA, row=2,
      say_medium="vacuum", medium="vacuum")


def heap(a):
    out = np.empty(2, dtype=object)
    out[0], out[1] = np.asarray(a[:7], dtype=float), np.asarray(a, dtype=float)
    return out


for code in "PQ":
    table("variable_" + code.lower(), [("WAVE", f"{code}D()", heap(W), "Angstrom"), ("FLUX", f"{code}D()", heap(FLUX), CGS),
                                       ("ERR", f"{code}D()", heap(SIGMA), CGS)], use=("WAVE", "FLUX"), pick=1,
          sigma=SIGMA, row=2, say_medium="air", medium="air")
zero = np.zeros(N)
bits = np.zeros(N, dtype=np.int32)
bits[1], bits[2], bits[3] = 1, 4, 5
telescope = [("WAVELENGTH", "D", W / 1e4, "um"), ("FLUX", "D", FLUX, "Jy"), ("FLUX_ERROR", "D", SIGMA, "Jy"),
             ("SURF_BRIGHT", "D", FLUX * 3, "MJy sr-1"), ("SB_ERROR", "D", SIGMA * 3, "MJy sr-1"),
             ("DQ", "J", bits, None)]
table("telescope", telescope, use=("WAVELENGTH", "FLUX"), unit="Jy", sigma=SIGMA, bad=bits % 2 == 1,
      say_medium="vacuum", medium="vacuum", extname="EXTRACT1D")
telescope[1] = ("FLUX", "D", zero, "Jy")
table("telescope_extended", telescope, use=("WAVELENGTH", "SURF_BRIGHT"), unit="MJy/sr", sigma=SIGMA * 3,
      bad=bits % 2 == 1, say_medium="vacuum", medium="vacuum", extname="EXTRACT1D")
down = W[::-1]
table("descending", [("freq", "D", 299792458.0 / (down * 1e-10) / 1e9, "GHz"), ("fnu", "D", FLUX, "mJy")],
      use=("freq", "fnu"), unit="mJy", medium="vacuum")
ints = np.arange(N, dtype=np.int16)
counts = fits.BinTableHDU.from_columns([
    fits.Column("wave", "I", array=ints, unit="Angstrom", bscale=2.0, bzero=4000.0),
    fits.Column("flux", "I", array=ints, unit=CGS, null=-99)])
counts.header["TSCAL1"], counts.header["TZERO1"] = 2.0, 4000.0
body = np.rec.fromarrays([ints.astype(">i2"), np.where(ints == 6, -99, ints + 1).astype(">i2")])
counts.header["AIRORVAC"] = "air"
counts.header["EXTNAME"] = "SCALED"
with open("scaled_columns.fits", "wb") as f:
    fits.PrimaryHDU().writeto("scaled_columns.fits", overwrite=True)
with open("scaled_columns.fits", "ab") as f:
    f.write(counts.header.tostring().encode() + body.tobytes() + b"\0" * (-body.nbytes % 2880))
with fits.open("scaled_columns.fits") as back:
    d = back[1].data
    flux = np.asarray(d["flux"], dtype=float)
    flux[np.asarray(d["flux"]) == -99] = np.nan
    case("scaled_columns", np.asarray(d["wave"], dtype=float), flux, medium="air")

with open("expected.csv", "w", newline="") as f:
    out = csv.writer(f)
    out.writerow(["case", "wavelength_A", "flux", "sigma", "flagged"])
    out.writerows(rows)
with open("expected.json", "w") as f:
    json.dump(cases, f, indent=1)
