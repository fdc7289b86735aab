"""Bad input: EDF headers that contradict the data or themselves."""

from __future__ import annotations

from typing import TYPE_CHECKING

from case import Case
from good_files import ONSETS_S, edf

if TYPE_CHECKING:
    from pathlib import Path

_AGAIN = "copy or export the file again"
_REPAIR = "export the recording again"


def _slipped(folder: Path) -> Path:
    """One byte too many in the patient field: all later fields and samples are moved."""
    path = edf()(folder)
    content = path.read_bytes()
    path.write_bytes(content[:90] + b"x" + content[90:])
    return path


CASES = (
    Case("ends inside its first header", edf(part=0.001),
         refused=f"ends inside its header; {_AGAIN}"),
    Case("ends inside its signal headers", edf(part=0.015),
         refused=f"ends inside its header; {_AGAIN}"),
    Case("half of its records are missing", edf(part=0.5),
         refused=f"is cut off: it holds 14 of 30 data records; {_AGAIN}"),
    Case("promises a terabyte", edf({"records": "99999999"}),
         refused=f"is cut off: it holds 30 of 99999999 data records; {_AGAIN}"),
    Case("promises 9999 signals", edf({"signals": "9999"}),
         refused=f"its header says 9999 signals and 1280 header bytes; {_AGAIN}"),
    Case("promises 9999 signals throughout", edf({"signals": "9999", "header bytes": "2560000"}),
         refused=f"ends inside its header; {_AGAIN}"),
    Case("no signals", edf({"signals": "0", "header bytes": "256"}),
         refused=f"its header says 0 signals and 256 header bytes; {_AGAIN}"),
    Case("a negative number of signals", edf({"signals": "-4"}),
         refused=f"its header says -4 signals and 1280 header bytes; {_AGAIN}"),
    Case("words for a number of records", edf({"records": "many"}),
         refused=f"has a damaged header; {_AGAIN}"),
    Case("an unknown number of records", edf({"records": "-1"}),
         warned="the header gives no number of data records; the file holds 30"),
    Case("more records than it says", edf({"records": "20"}),
         warned="the header gives 20 data records; the file holds 30, all are taken"),
    Case("records of no duration", edf({"duration": "0"}),
         refused=f"its header gives data records a duration of 0 s; {_REPAIR}"),
    Case("records of negative duration", edf({"duration": "-1"}),
         refused=f"its header gives data records a duration of -1 s; {_REPAIR}"),
    Case("records of a nanosecond", edf({"duration": "1e-9"}),
         refused=f"its header gives a sampling rate of 1e+11 Hz; {_REPAIR}"),
    Case("a duration that is no number", edf({"duration": "nan"}),
         refused=f"its header gives data record a duration that is no number; {_REPAIR}"),
    Case("an interrupted recording", edf({"reserved": "EDF+D"}),
         refused="is an interrupted (EDF+D) recording, whose event times cannot be placed; save it "
                 "as a continuous one (EDF+C)"),
    Case("no number of records", edf({"records": ""}),
         refused=f"has a damaged header; {_AGAIN}"),
    Case("a header that slipped by a byte", _slipped,
         warned="the file goes on for 1 byte behind its last whole data record: left out"),
    Case("a physical minimum in words", edf(signal={(1, "physical minimum"): "low"}),
         refused=f"its header gives signal 2 a physical minimum that is no number; {_REPAIR}"),
    Case("an infinite physical maximum", edf(signal={(1, "physical maximum"): "inf"}),
         refused=f"its header gives signal 2 a physical maximum that is no number; {_REPAIR}"),
    Case("decimal commas in the header",
         edf(signal={(i, "physical maximum"): "400,0" for i in range(3)}),
         loaded=lambda trials: abs(float(trials.data_uv.std()) - 20) < 1),
    Case("no samples in a record", edf(signal={(1, "samples"): "0"}),
         refused=f"its header gives signal 2 0 samples in a record; {_REPAIR}"),
    Case("a negative number of samples", edf(signal={(1, "samples"): "-100"}),
         refused=f"its header gives signal 2 -100 samples in a record; {_REPAIR}"),
    Case("equal digital minimum and maximum",
         edf(signal={(0, "digital minimum"): "7", (0, "digital maximum"): "7"}),
         warned="channel Fp1 cannot be used: its digital minimum and maximum are both 7, so it has "
                "no scale",
         loaded=lambda trials: trials.ch_names == ("Cz", "Oz")),
    Case("equal physical minimum and maximum of the channel asked for",
         edf(signal={(2, "physical minimum"): "0", (2, "physical maximum"): "0"}),
         warned="channel Oz cannot be used: its physical minimum and maximum are both 0, so it has "
                "no scale",
         loaded=lambda trials: trials.ch_names == ("Fp1", "Cz")),
    Case("no channel with a scale",
         edf(signal={(i, "physical maximum"): "-400" for i in range(3)}),
         refused="none of its EEG channels can be used (Fp1: its physical minimum and maximum are "
                 f"both -400, so it has no scale); {_REPAIR}"),
    Case("two sampling rates", edf(samples={0: 50}),
         warned="channels have different sampling rates (50 and 100 Hz); the slower ones were "
                "raised to the fastest"),
    Case("annotations but no signals", edf(names=()),
         refused="holds annotations but no signals; open the recording itself"),
    Case("annotations in Latin-1", edf(label="grün", encoding="latin-1"),
         loaded=lambda trials: set(trials.labels) == {"grün"}),
    Case("annotations before and after the recording", edf(notes=(-2.0, *ONSETS_S, 45.0)),
         warned="some annotations lie outside the recording and were left out"),
    Case("a channel without a unit", edf(signal={(i, "unit"): "" for i in range(3)}),
         warned="a trial typically spans 112,062,256 µV from peak to peak, far more than EEG "
                "(5,000 µV); check the unit in the file"),
)  # fmt: skip
