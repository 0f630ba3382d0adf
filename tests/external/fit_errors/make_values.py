"""Errors of fitted line fluxes by general-purpose libraries: covariance and profiles of chi-square.

Two noisy spectra (numpy's generator, seeds below) are written to spectra.csv, and to values.csv the fluxes
of weighted fits with their covariance errors (scipy.optimize.curve_fit, absolute_sigma) and the distances
below and above at which chi-square, minimised over everything else (scipy.optimize.least_squares), has risen
by one (scipy.optimize.brentq); lmfit's standard error of the same parameter stands beside them.
"""
import lmfit
import numpy as np
import scipy
from scipy.optimize import brentq, curve_fit, least_squares

CASES = {
    # centre, standard deviation, flux of each line; seed
    "single": ([(5050.0, 4.0, 30.0)], 11),
    "blend": ([(5046.0, 3.5, 60.0), (5057.0, 3.5, 25.0)], 12),
}
X = np.arange(5000.0, 5100.5, 1.0)
SIGMA = 1.0


def model(x, *p):
    t = (2 * x - X[0] - X[-1]) / (X[-1] - X[0])
    y = p[0] + p[1] * t
    for i in range(2, len(p), 3):
        flux, centre, width = p[i : i + 3]
        y = y + flux / (width * np.sqrt(2 * np.pi)) * np.exp(-0.5 * ((x - centre) / width) ** 2)
    return y


def profile(y, best, index, sign, error):
    chi2 = lambda p: np.sum(((y - model(X, *p)) / SIGMA) ** 2)
    floor = chi2(best)

    def rise(value):
        others = [i for i in range(len(best)) if i != index]

        def residuals(q):
            p = np.array(best)
            p[others], p[index] = q, value
            return (y - model(X, *p)) / SIGMA

        found = least_squares(residuals, np.array(best)[others], xtol=1e-14, ftol=1e-14, gtol=1e-14)
        return 2 * found.cost - floor - 1.0

    edge = best[index] + sign * 2.5 * error
    return abs(brentq(rise, best[index] + sign * 1e-9, edge, xtol=1e-9) - best[index])


with open("spectra.csv", "w") as out, open("values.csv", "w") as values:
    head = f"scipy {scipy.__version__}, lmfit {lmfit.__version__}, numpy {np.__version__}; make_values.py"
    print(f"# Made by {head}.\ncase,wavelength_aa,flux,sigma", file=out)
    print(f"# Made by {head}.\ncase,line,flux,covariance_sigma,profile_below,profile_above,lmfit_stderr", file=values)
    for name, (lines, seed) in CASES.items():
        rng = np.random.default_rng(seed)
        truth = [10.0, 1.0]
        for centre, width, flux in lines:
            truth += [flux, centre, width]
        y = model(X, *truth) + SIGMA * rng.standard_normal(len(X))
        for x, v in zip(X, y):
            print(f"{name},{x:.1f},{v:.12g},{SIGMA}", file=out)
        best, cov = curve_fit(model, X, y, p0=truth, sigma=np.full(len(X), SIGMA), absolute_sigma=True, xtol=1e-14, ftol=1e-14)
        parameters = lmfit.Parameters()
        for i, v in enumerate(truth):
            parameters.add(f"p{i}", value=v)
        fit = lmfit.minimize(
            lambda q: (y - model(X, *[q[f"p{i}"].value for i in range(len(truth))])) / SIGMA, parameters, scale_covar=False, xtol=1e-14, ftol=1e-14
        )
        for k in range(len(lines)):
            i = 2 + 3 * k
            error = np.sqrt(cov[i, i])
            low, high = (profile(y, best, i, s, error) for s in (-1, 1))
            print(f"{name},{k},{best[i]:.10g},{error:.10g},{low:.10g},{high:.10g},{fit.params[f'p{i}'].stderr:.10g}", file=values)
