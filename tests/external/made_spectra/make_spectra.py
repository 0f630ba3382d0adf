"""Spectra with rotational structure, Fraunhofer lines and cosmic-ray hits, made with numpy from published lines.

co.csv: CO v(1-0) from the HITRAN lines in ../hitran/co_v10_hitran.csv, R = 1000, on a straight continuum.
cn.csv: CN violet (0-0) from the published line list and sunlight from the published TSIS-1 spectrum, both as
bundled in line-lists/, R = 1000, reddened by 12 % per 1000 A, heliocentric velocity -25 km/s.
Lower levels are thermal; each absorbed photon of a flat source is emitted again by the branching of its upper
level. Noise and hits come from numpy's generator. truth.csv holds the injected fluxes.
"""
import gzip

import numpy as np

C_KM_S = 299792.458
HC_OVER_K = 1.438776877  # cm K (CODATA 2018)
rng = np.random.default_rng(20311)


def table(path, comment="#"):
    opened = gzip.open(path, "rt") if path.endswith("gz") else open(path)
    with opened as file:
        rows = [line.strip().split(",") for line in file if not line.startswith(comment)]
    return [dict(zip(rows[0], row)) for row in rows[1:]]


def fluoresce(lines, temperature):
    """lines: (wavelength A, A s-1, g_up, g_low, E_low cm-1, lower, upper) -> wavelength, share of energy."""
    pumped, total = {}, {}
    for w, a, gu, gl, e, low, up in lines:
        if e is not None:
            rate = gl * np.exp(-HC_OVER_K * e / temperature) * a * gu / gl * w**3
            pumped[up] = pumped.get(up, 0.0) + rate
        total[up] = total.get(up, 0.0) + a
    w = np.array([line[0] for line in lines])
    share = np.array([pumped.get(l[6], 0.0) * l[1] / total[l[6]] / l[0] for l in lines])
    return w, share / share.sum()


def blur(x, w, share, power):
    sigma = w / power / 2.354820045
    return (share / sigma / np.sqrt(2 * np.pi) * np.exp(-0.5 * ((x[:, None] - w) / sigma) ** 2)).sum(axis=1)


def write(name, x, clean, sigma, head):
    y = clean + sigma * rng.standard_normal(len(x))
    hits = rng.choice(np.arange(5, len(x) - 5), 6, replace=False)
    y[hits] += sigma[hits] * rng.uniform(20, 60, len(hits))
    with open(name, "w") as out:
        print(f"# {head}; 6 cosmic-ray hits; make_spectra.py\nwavelength,flux,error", file=out)
        for row in zip(x, y, sigma):
            print("%.4f,%.6e,%.4e" % row, file=out)


truth = []
co = [l for l in table("../hitran/co_v10_hitran.csv") if l["iso"] == "1" and l["vu"] == "1" and l["vl"] == "0"]
lines = []
for l in co:
    j = int(l["J_low"])
    up = j + (1 if l["branch"] == "R" else -1)
    lines.append((1e8 / float(l["nu_cm1"]), float(l["A_s1"]), float(l["g_up"]), float(l["g_low"]), float(l["E_low_cm1"]), j, up))
w, share = fluoresce(lines, 55.0)
x = np.exp(np.arange(np.log(44500.0), np.log(49200.0), 1 / 2500.0))
flux = 3.0e-14
clean = 1.5e-16 * (1 - (x - 46700) / 40000) + flux * blur(x, w, share, 1000.0)
write("co.csv", x, clean, np.full(len(x), 1.2e-18), "CO v(1-0), R = 1000, vacuum A, erg s-1 cm-2 A-1, comet's frame")
truth.append(("co", "CO-4.67um", flux))

ground = next(r for r in table("../../../line-lists/molecules/cn_ground_state.csv") if r["v"] == "0")
b, d = float(ground["b_cm1"]), float(ground["d_cm1"])
lines = []
for l in table("../../../line-lists/molecules/cn_violet_lines.csv"):
    if l["v_upper"] != "0" or l["v_lower"] != "0":
        continue
    n, ju, jl = int(l["n_lower"]), float(l["j_upper"]), float(l["j_lower"])
    e = b * n * (n + 1) - d * (n * (n + 1)) ** 2
    up = (int(l["n_upper"]), ju)
    lines.append((float(l["wavelength_vacuum_aa"]), float(l["einstein_a_per_s"]), 2 * ju + 1, 2 * jl + 1, e, (n, jl), up))
w, share = fluoresce(lines, 65.0)
sun = table("../../../line-lists/solar/tsis1_hsrs.csv.gz")
sw = 10 * np.array([float(r["wavelength_vacuum_nm"]) for r in sun])
sf = np.array([float(r["irradiance_w_m2_nm"]) for r in sun])
x = np.exp(np.arange(np.log(3760.0), np.log(4060.0), 1 / 2500.0))
shift = 1 - 25.0 / C_KM_S
near = (sw > 3700) & (sw < 4120)
sw, sf = sw[near] * shift, sf[near]
step = np.gradient(sw)
scattered = np.array([(sf * step * np.exp(-0.5 * ((sw - c) / (c / 1000 / 2.354820045)) ** 2)).sum() for c in x])
scattered /= np.array([(step * np.exp(-0.5 * ((sw - c) / (c / 1000 / 2.354820045)) ** 2)).sum() for c in x])
scattered *= 6.0e-15 * (1 + 0.12 * (x - 3900) / 1000) / scattered[np.argmin(abs(x - 3900))]
flux = 2.5e-13
clean = scattered + flux * blur(x, w, share, 1000.0)
write("cn.csv", x, clean, 0.006 * clean + 2e-17, "CN (0-0) on sunlight, R = 1000, vacuum A, erg s-1 cm-2 A-1, comet's frame")
truth.append(("cn", "CN-3883", flux))
with open("truth.csv", "w") as out:
    print(f"# Injected fluxes, erg s-1 cm-2; numpy {np.__version__}, make_spectra.py\nspectrum,band,flux", file=out)
    for row in truth:
        print("%s,%s,%.6e" % row, file=out)
