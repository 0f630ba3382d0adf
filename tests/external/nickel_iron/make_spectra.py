"""Writes near-ultraviolet spectra with known columns of Ni I and Fe I, for tests.

Run in this folder: python3 make_spectra.py [SEED ...] (numpy). Nothing of the program under test is used:
g-factors are those of the independent solution in ../fluorescence/g_independent.csv (3 au, +15 km/s), the
positions of CN lines are the published ones in line-lists/molecules, CN intensities are those of a thermal
rotational population. Two lines are three times too bright, as if their published gf were three times too
small. truth.csv holds what was put in.
"""
import csv
import sys

import numpy as np

H, C, K = 6.62607015e-27, 2.99792458e10, 1.380649e-16  # erg s, cm/s, erg/K
RESOLVING_POWER, SAMPLES_PER_FWHM = 40_000.0, 2.5
SLIT_ARCSEC = (0.5, 8.0)
OBSERVER_KM_S = -8.4
COLUMNS = {"ni_i": 2.4e10, "fe_i": 2.0e10}  # cm-2, mean in the slit
WRONG = {("ni_i", 3515.052): 3.0, ("fe_i", 3737.131): 3.0}
CN_FLUX, CN_KELVIN, CN_B_CM1 = 1.2e-13, 250.0, 1.96  # erg/s/cm2; upper-state rotational constant
NOISE = 3.0e-16  # erg/s/cm2/Angstrom
RANGE = (3300.0, 3900.0)  # of the lines used, Angstrom in air


def table(path):
    with open(path, newline="", encoding="utf-8") as f:
        return list(csv.DictReader(line for line in f if not line.startswith("#")))


def air(vacuum_aa):
    """Air wavelength by the dispersion formula of Edlen (1966); enough to 0.001 Angstrom here."""
    s2 = (1e4 / vacuum_aa) ** 2
    n = 1 + 8.34213e-5 + 2.406030e-2 / (130 - s2) + 1.5997e-4 / (38.9 - s2)
    return vacuum_aa / n


def atoms():
    solid = np.prod(SLIT_ARCSEC) * np.deg2rad(1 / 3600) ** 2
    for row in table("../fluorescence/g_independent.csv"):
        aa = float(row["wl_air_A"])
        here = row["r_h_au"] == "3.0" and row["rdot_km_s"] == "15.0"
        if here and row["species"] in COLUMNS and RANGE[0] < aa < RANGE[1]:
            energy = H * C / (aa * 1.000285e-8)
            flux = COLUMNS[row["species"]] * solid / (4 * np.pi) * float(row["g_photons_s"]) * energy
            yield aa, flux * WRONG.get((row["species"], aa), 1.0)


def cyanogen():
    rows = [r for r in table("../../../line-lists/molecules/cn_violet_lines.csv") if r["v_upper"] == r["v_lower"] == "0"]
    n, j = (np.array([float(r[k]) for r in rows]) for k in ("n_upper", "j_upper"))
    a = np.array([float(r["einstein_a_per_s"]) for r in rows])
    share = a * (2 * j + 1) * np.exp(-H * C * CN_B_CM1 * n * (n + 1) / (K * CN_KELVIN))
    aa = air(np.array([float(r["wavelength_vacuum_aa"]) for r in rows]))
    return aa, CN_FLUX * share / share.sum()


def spectrum(seed):
    rng = np.random.default_rng(seed)
    beta = OBSERVER_KM_S * 1e5 / C
    shift = np.sqrt((1 + beta) / (1 - beta))
    own = list(atoms())
    x = np.concatenate([np.arange(aa - 1.6, aa + 1.6, aa / RESOLVING_POWER / SAMPLES_PER_FWHM) for aa, _ in sorted(own)])
    x = np.sort(x) * shift
    x = x[np.insert(np.diff(x) > 0.5 * x[0] / RESOLVING_POWER / SAMPLES_PER_FWHM, 0, True)]
    y = 4.0e-16 * (1 + (x - 3600) / 1500)
    centres, fluxes = (np.append(a, b) for a, b in zip(np.array(own).T, cyanogen()))
    for centre, flux in zip(centres * shift, fluxes):
        sigma = centre / RESOLVING_POWER / np.sqrt(8 * np.log(2))
        near = np.abs(x - centre) < 8 * sigma
        y[near] += flux / sigma / np.sqrt(2 * np.pi) * np.exp(-0.5 * ((x[near] - centre) / sigma) ** 2)
    error = np.hypot(NOISE, 0.01 * y)
    return x, y + rng.normal(size=x.size) * error, error


def main():
    seeds = [int(a) for a in sys.argv[1:]] or [1, 2, 3]
    for seed in seeds:
        with open(f"uv_{seed}.csv", "w", encoding="utf-8") as f:
            f.write("# made by make_spectra.py; wavelength in air, Angstrom; erg s-1 cm-2 Angstrom-1\n")
            f.write("wavelength,flux,error\n")
            f.writelines(f"{a:.4f},{b:.4e},{c:.3e}\n" for a, b, c in zip(*spectrum(seed)))
    with open("truth.csv", "w", encoding="utf-8") as f:
        f.write("# made by make_spectra.py: columns in cm-2; lines that are too bright by a factor\n")
        f.write("what,species,wavelength_air_aa,value\n")
        f.writelines(f"column,{s},,{n}\n" for s, n in COLUMNS.items())
        f.writelines(f"wrong,{s},{aa},{v}\n" for (s, aa), v in WRONG.items())


if __name__ == "__main__":
    main()
