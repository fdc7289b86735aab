"""Zero-phase filters: windowed-sinc kernels with linear phase, their delay taken out."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

# Length of a Hamming-windowed sinc: normalised transition width 3.3 / taps (Widmann,
# Schroeger & Maess 2015, J Neurosci Methods 250:34-46; value from memory).
_HAMMING_WIDTH = 3.3


def transition_hz(edge_hz: float, *, high_pass: bool, sfreq_hz: float) -> float:
    """Width of the transition beyond a filter edge.

    A quarter of the edge, at least 2 Hz, but never past 0 Hz or the Nyquist frequency.
    The edge itself is still passed; half the amplitude (-6 dB) is reached in the middle of
    the transition.
    """
    room = edge_hz if high_pass else sfreq_hz / 2 - edge_hz
    return min(max(0.25 * edge_hz, 2.0), room)


def design_filter(
    sfreq_hz: float, *, high_pass_hz: float | None, low_pass_hz: float | None
) -> NDArray[np.float64]:
    """Design a symmetric FIR kernel.

    Low-pass kernels are Hamming-windowed sincs; a high-pass is what a low-pass takes away,
    a band-pass the difference of two low-passes.

    Parameters
    ----------
    sfreq_hz : float
        Sampling rate.
    high_pass_hz, low_pass_hz : float or None
        Edges of the band that is passed in full.

    Returns
    -------
    ndarray of float64, shape (taps,)
        Odd number of taps, symmetric.

    Raises
    ------
    ValueError
        If no edge is given, or one is not below the Nyquist frequency.

    References
    ----------
    Widmann, Schroeger & Maess 2015, J Neurosci Methods 250:34-46.
    """
    kernels = []
    for edge_hz, high_pass in ((high_pass_hz, True), (low_pass_hz, False)):
        if edge_hz is None:
            continue
        if not 0 < edge_hz < sfreq_hz / 2:
            raise ValueError(f"{edge_hz:g} Hz is not between 0 and {sfreq_hz / 2:g} Hz")
        width_hz = transition_hz(edge_hz, high_pass=high_pass, sfreq_hz=sfreq_hz)
        half_hz = edge_hz - width_hz / 2 if high_pass else edge_hz + width_hz / 2
        kernels.append((_low_pass(half_hz, width_hz, sfreq_hz), high_pass))
    if not kernels:
        raise ValueError("a filter needs at least one edge")
    taps = max(len(kernel) for kernel, _ in kernels)
    total = np.zeros(taps)
    if low_pass_hz is None:
        total[taps // 2] = 1.0
    for kernel, high_pass in kernels:
        offset = (taps - len(kernel)) // 2
        total[offset : offset + len(kernel)] += -kernel if high_pass else kernel
    return total


def _low_pass(half_hz: float, width_hz: float, sfreq_hz: float) -> NDArray[np.float64]:
    from scipy.signal import firwin

    taps = math.ceil(_HAMMING_WIDTH / width_hz * sfreq_hz)
    taps += 1 - taps % 2
    kernel: NDArray[np.float64] = firwin(taps, half_hz, window="hamming", fs=sfreq_hz)
    return kernel


def filter_inside(data: NDArray[np.float64], kernel: NDArray[np.float64]) -> NDArray[np.float64]:
    """Filter the last axis and keep the samples that the whole kernel has seen.

    Parameters
    ----------
    data : ndarray of float64, shape (..., samples)
        With half a kernel of extra samples at each end.
    kernel : ndarray of float64, shape (taps,)
        Symmetric, odd.

    Returns
    -------
    ndarray of float64, shape (..., samples - taps + 1)
        Without delay: sample i belongs to input sample i + taps // 2.
    """
    from scipy.signal import oaconvolve

    shape = (1,) * (data.ndim - 1) + (-1,)
    filtered: NDArray[np.float64] = oaconvolve(data, kernel.reshape(shape), mode="valid", axes=-1)
    return filtered
