"""Answers questions about filters and spectra with SciPy: JSON in, JSON out. Used by compare.test.ts."""
import json
import sys

import numpy as np
from scipy import signal

TYPES = {"low-pass": "lowpass", "high-pass": "highpass", "band-pass": "bandpass", "band-stop": "bandstop"}


def window_of(q):
    kind = {"triangular": "bartlett", "rectangular": "boxcar"}.get(q["window"], q["window"])
    return ("kaiser", q["beta"]) if kind == "kaiser" else kind


def answer(q):
    ask = q["ask"]
    if ask == "sinc":
        taps = signal.firwin(q["taps"], q["edges"], window=window_of(q), pass_zero=TYPES[q["shape"]], scale=True, fs=1.0)
        return taps.tolist()
    if ask == "gain":
        w = 2 * np.pi * np.array(q["at"])
        return np.abs(signal.freqz(q["taps"], worN=w)[1]).tolist()
    if ask == "filter":
        return np.convolve(q["x"], q["taps"], "valid").tolist()
    if ask == "least-squares":
        return signal.firls(q["taps"], q["bands"], q["gains"], weight=q["weights"], fs=1.0).tolist()
    if ask == "equiripple":
        taps = signal.remez(q["taps"], q["bands"], q["gains"], weight=q["weights"], fs=1.0, maxiter=200, grid_density=64)
        return taps.tolist()
    if ask == "savitzky-golay":
        return signal.savgol_coeffs(q["taps"], q["degree"]).tolist()
    if ask == "welch":
        f, p = signal.welch(q["x"], fs=q["rate"], window=q["window"], nperseg=q["segment"], noverlap=q["segment"] // 2,
                            detrend="constant", scaling="density")
        return p.tolist()
    if ask == "trend":
        t = np.arange(len(q["x"]))
        fit = np.polynomial.Polynomial.fit(t, q["x"], q["degree"])
        return (np.array(q["x"]) - fit(t)).tolist()
    raise ValueError(ask)


def main():
    out = []
    for q in json.load(sys.stdin):
        try:
            out.append({"ok": answer(q)})
        except Exception as e:  # what SciPy refuses is compared too
            out.append({"refused": str(e)[:200]})
    json.dump(out, sys.stdout)


main()
