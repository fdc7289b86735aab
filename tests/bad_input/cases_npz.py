"""Bad input: NumPy archives with pickles, wrong shapes, wrong times."""

from __future__ import annotations

import io
import zipfile
from typing import TYPE_CHECKING

import numpy as np
from case import Case
from good_files import npz, trials_volts

if TYPE_CHECKING:
    from pathlib import Path

_KEYS = "store data (trials x channels x samples, volts), times_s and ch_names"

_RISE = "store seconds from the event, one after the other"


def _times(*changes: tuple[int, float]) -> np.ndarray:
    times_s = np.arange(200) / 100 - 0.8
    for at, value in changes:
        times_s[at] = value
    return times_s


def _lying(shape: tuple[int, ...], *, dtype: str = "<f8", claim: bool):
    """An archive whose data promise more than they are; ``claim`` makes its list lie as well."""

    def make(folder: Path) -> Path:
        path = npz(leave_out=("data",))(folder)
        stream = io.BytesIO()
        np.lib.format.write_array_header_1_0(
            stream, {"shape": shape, "fortran_order": False, "descr": dtype}
        )
        with zipfile.ZipFile(path, "a", zipfile.ZIP_DEFLATED) as archive:
            archive.writestr("data.npy", stream.getvalue() + bytes(1000))
        if claim:
            _claim(path, stream.tell() + int(np.prod(shape, dtype=object)) * 8)
        return path

    return make


def _damaged(folder: Path) -> Path:
    """A byte among the samples is another: only the archive's checksum knows."""
    path = npz()(folder)
    content = bytearray(path.read_bytes())
    content[20_000] ^= 1
    path.write_bytes(content)
    return path


def _claim(path: Path, size: int) -> None:
    """Overwrite the size that the archive's list gives for its last member (PKZIP 4.3.12)."""
    content = bytearray(path.read_bytes())
    at = content.rindex(b"PK\x01\x02")
    content[at + 24 : at + 28] = min(size, 2**32 - 2).to_bytes(4, "little")
    path.write_bytes(content)


CASES = (
    Case("no data", npz(leave_out=("data",)), refused=f"has no array named data; {_KEYS}"),
    Case("no times", npz(leave_out=("times_s",)), refused=f"has no array named times_s; {_KEYS}"),
    Case("no channel names", npz(leave_out=("ch_names",)),
         refused=f"has no array named ch_names; {_KEYS}"),
    Case("pickled data", npz(data=np.array([{"a": 1}], dtype=object), pickled=True),
         refused="data holds Python objects; store it as a plain array of numbers"),
    Case("pickled labels", npz(label=np.array(["a", 1] * 6, dtype=object), pickled=True),
         refused="label holds Python objects; store it as a plain array of numbers"),
    Case("data of two dimensions", npz(data=trials_volts()[0]),
         refused="data is float64 of shape (3, 200); store numbers as trials x channels x samples, "
                 "in volts"),
    Case("data without trials", npz(data=np.zeros((0, 3, 200))),
         refused="data is float64 of shape (0, 3, 200); store numbers as trials x channels x "
                 "samples, in volts"),
    Case("complex data", npz(data=trials_volts() + 1j),
         refused="data is complex128 of shape (12, 3, 200); store numbers as trials x channels x "
                 "samples, in volts"),
    Case("data of text", npz(data=np.full((2, 3, 200), "a")),
         refused="data is <U1 of shape (2, 3, 200); store numbers as trials x channels x samples, "
                 "in volts"),
    Case("channels and samples swapped", npz(data=trials_volts().swapaxes(1, 2)),
         refused=f"times_s has shape (200,) where data asks for (3,); {_KEYS}"),
    Case("too few channel names", npz(ch_names=np.array(["Cz"])),
         refused=f"ch_names has shape (1,) where data asks for (3,); {_KEYS}"),
    Case("numbers for channel names", npz(ch_names=np.arange(3)),
         refused=f"times_s must be numbers and ch_names texts; {_KEYS}"),
    Case("a channel name twice in an archive", npz(ch_names=np.array(["Oz", "Cz", "Oz"])),
         refused="ch_names repeats 'Oz'; give each channel its own name"),
    Case("labels for other trials", npz(label=np.array(["a"])),
         refused="label has shape (1,) for 12 trials; store one label for each trial"),
    Case("a time that is no number", npz(times_s=_times((5, np.nan))),
         refused="times_s needs at least 2 finite numbers; store seconds"),
    Case("an infinite time", npz(times_s=_times((5, np.inf))),
         refused="times_s needs at least 2 finite numbers; store seconds"),
    Case("times that go back", npz(times_s=_times((5, -0.9))),
         refused=f"times_s does not rise from sample to sample (steps -0.14 to 0.16 s); {_RISE}"),
    Case("times that run backwards", npz(times_s=_times()[::-1].copy()),
         refused=f"times_s does not rise from sample to sample (steps -0.01 to -0.01 s); {_RISE}"),
    Case("a time twice", npz(times_s=_times((6, -0.75))),
         refused=f"times_s does not rise from sample to sample (steps 0 to 0.02 s); {_RISE}"),
    Case("a gap in the times", npz(times_s=np.where(np.arange(200) < 50, _times(), _times() + 1)),
         refused="times_s is not evenly spaced (steps 0.01 to 1.01 s); store seconds from the "
                 "event at one sampling rate"),
    Case("times that are all the same", npz(times_s=np.zeros(200)),
         refused=f"times_s does not rise from sample to sample (steps 0 to 0 s); {_RISE}"),
    Case("times beyond all measure", npz(times_s=np.repeat([-1.7e308, 1.7e308], 100)),
         refused=f"times_s does not rise from sample to sample (steps 0 to inf s); {_RISE}"),
    Case("times in milliseconds", npz(times_s=_times() * 1000),
         warned="the sampling rate is 0.1 Hz, very low for EEG: check the unit of time"),
    Case("another rate than the times", npz(sfreq_hz=np.array(250.0)),
         refused="sfreq_hz does not fit times_s, whose step is 0.01 s (100 Hz); correct one of the "
                 "two"),
    Case("a rate in words", npz(sfreq_hz=np.array("100 Hz")),
         refused="sfreq_hz does not fit times_s, whose step is 0.01 s (100 Hz); correct one of the "
                 "two"),
    Case("data that promise a terabyte", _lying((1000, 3, 40_000_000), claim=False),
         refused="data promises 960,000,000,000 bytes but the archive holds 1,000; write the "
                 "archive again"),
    Case("an archive that promises gigabytes", _lying((12, 3, 10_000_000), claim=True),
         refused="data is said to hold 2,880,000,128 bytes, which <...> bytes of file cannot give; "
                 "copy or write the archive again"),
    Case("an archive with a byte changed", _damaged,
         refused="is damaged or incomplete (no sound archive); copy or write it again"),
    Case("a trial that is no number", npz(data=np.concatenate(
             [trials_volts(11), np.full((1, 3, 200), np.nan)])),
         warned="1 trial holds samples that are no number and was left out"),
    Case("whole numbers in place of volts", npz(data=(trials_volts() * 1e6).astype("<i2")),
         warned="a trial typically spans 111,500,000 µV from peak to peak, far more than EEG "
                "(5,000 µV); check the unit in the file"),
    Case("one trial in an archive", npz(data=trials_volts(1)),
         loaded=lambda trials: len(trials) == 1),
    Case("one channel in an archive",
         npz(data=trials_volts(n_channels=1), ch_names=np.array(["Oz"])),
         loaded=lambda trials: trials.ch_names == ("Oz",)),
)  # fmt: skip
