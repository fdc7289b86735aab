"""Methods: wavelets, phase alignment, power, average waveforms."""

from __future__ import annotations

from typing import TYPE_CHECKING

from phasebrush.core.transform_settings import REACH_SIGMAS
from phasebrush.model.methods.references import Source, cited
from phasebrush.model.methods.wording import counted, number, span, typeset
from phasebrush.model.stale import Result

if TYPE_CHECKING:
    from phasebrush.core.transform_settings import TransformSettings
    from phasebrush.core.trials import Trials
    from phasebrush.model.results import Snapshot


def transform_words(settings: TransformSettings, trials: Trials) -> str:
    """Family, frequencies, cycles, widths, time step, ends."""
    freqs = counted(int(settings.count), "frequency", "frequencies")
    said = [
        (
            "Each trial was transformed with complex Morlet wavelets, Gaussian-windowed complex "
            f"exponentials made zero-mean {cited(Source.TALLON_BAUDRY)}, at {freqs}"
        )
    ]
    if settings.count == 1:
        said[0] += f" ({number(settings.low_hz)} Hz, {_cycles(settings.low_cycles)})."
    else:
        said[0] += f", log-spaced from {span(settings.low_hz, settings.high_hz, 'Hz')}"
        if settings.low_cycles == settings.high_cycles:
            said[0] += f", {_cycles(settings.low_cycles)} each."
        else:
            said[0] += (
                f", with {number(settings.low_cycles)} cycles at the lowest to "
                f"{_cycles(settings.high_cycles)} at the highest, linear in log frequency."
            )
    rows = [0] if settings.count == 1 else [0, -1]
    widths = "; ".join(_widths(settings, row) for row in rows)
    said.append(f"{widths[0].upper()}{widths[1:]} {cited(Source.COHEN)}.")
    step_ms = 1000 * settings.time_step_s(trials.sfreq_hz)
    said.append(f"Coefficients were kept every {number(step_ms)} ms.")
    said.append(
        f"Points within {REACH_SIGMAS:g} temporal standard deviations of either end of the data "
        "took part in no statistic."
    )
    return " ".join(said)


def _cycles(cycles: float) -> str:
    return f"{number(cycles)} {'cycle' if cycles == 1 else 'cycles'}"


def _widths(settings: TransformSettings, row: int) -> str:
    time_ms, full_ms = 1000 * settings.sigma_t_s[row], 1000 * settings.fwhm_t_s[row]
    freq, full = settings.sigma_f_hz[row], settings.fwhm_f_hz[row]
    return (
        f"at {number(settings.freqs_hz[row])} Hz the standard deviation was "
        f"{number(time_ms)} ms (full width at half maximum {number(full_ms)} ms) in time and "
        f"{number(freq)} Hz ({number(full)} Hz) in frequency"
    )


def phase_words(snapshot: Snapshot) -> str:
    """ITC, PPC and what chance gives."""
    said = (
        "Inter-trial coherence (ITC) is the length of the mean unit phasor over trials "
        f"{cited(Source.TALLON_BAUDRY)}; pairwise phase consistency (PPC) is the mean cosine of "
        "the phase difference over all pairs of trials, whose expectation does not depend on "
        f"their number {cited(Source.VINCK)}. Chance levels are the ITC that uniform phases of "
        "as many trials exceed with probability 0.05 by the Rayleigh test "
        f"{cited(Source.ZAR, Source.WILKIE)}."
    )
    outlines, maps = snapshot.outlines, snapshot.maps
    fresh = Result.OUTLINES not in snapshot.outdated
    if fresh and maps is not None and outlines is not None and outlines.aligned is not None:
        said += (
            " Outlined points of a map passed the Rayleigh test at every valid point, corrected "
            f"for their number by the false discovery rate, q = {number(outlines.q)} "
            f"{cited(Source.BENJAMINI)}."
        )
    return said


def power_words(snapshot: Snapshot) -> str:
    """Parts of the power, baseline, dB."""
    start, end = snapshot.state.baseline_s
    said = (
        "Total power is the mean squared amplitude over trials (µV², amplitudes as of a cosine), "
        "evoked power the squared amplitude of the mean coefficient, induced power total less "
        f"evoked. Maps show {snapshot.state.power_part} power in decibels, 10 log10 of the mean "
        "over trials against the mean of the same set and part over the valid points from "
        f"{span(start, end, 's')} at that frequency."
    )
    notes = () if snapshot.maps is None else snapshot.maps.notes
    return " ".join((said, *(f"Note: {typeset(note)}." for note in notes)))


def average_words() -> str:
    """Average waveforms and their bands."""
    return (
        "Average waveforms are means over trials; 95 % bands are from the standard error and "
        "Student's t with n − 1 degrees of freedom."
    )
