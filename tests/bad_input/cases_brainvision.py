"""Bad input: BrainVision headers, markers and data that do not belong together."""

from __future__ import annotations

from typing import TYPE_CHECKING

from case import Case
from good_files import brainvision

if TYPE_CHECKING:
    from pathlib import Path

_AGAIN = "copy or export the file again"
_REPAIR = "correct the header, or export the recording again"
_POSITIONS = (
    "line 7: a marker needs type, description, position and size, the last two as whole numbers; "
    "correct the line or take it out"
)


def _latin1_markers(folder: Path) -> Path:
    path = brainvision()(folder)
    markers = path.with_suffix(".vmrk")
    markers.write_bytes(markers.read_bytes().replace(b"Mk2=Stimulus", b"Mk2=Gr\xfcn"))
    return path


CASES = (
    Case("the data file is missing", brainvision(leave_out=("eeg",)),
         refused="its data file (.eeg) is missing; put it in the same folder, under the name that "
                 "the header gives"),
    Case("the data file is in another folder", brainvision({"DataFile=a.eeg": "DataFile=../a.eeg"}),
         refused="its header looks for the data file in another folder; put it beside the header "
                 "and give DataFile= its name alone"),
    Case("the data file is an absolute path",
         brainvision({"DataFile=a.eeg": "DataFile=C:\\subjects\\Fernsby\\a.eeg"}),
         refused="its header looks for the data file in another folder; put it beside the header "
                 "and give DataFile= its name alone"),
    Case("the marker file is in another folder",
         brainvision({"MarkerFile=a.vmrk": "MarkerFile=/etc/passwd"}),
         refused="its header looks for the marker file in another folder; put it beside the header "
                 "and give MarkerFile= its name alone"),
    Case("the marker file is missing", brainvision(leave_out=("vmrk",)),
         refused="has no events, so no trials can be cut: the marker file that the header names is "
                 "missing; put a table a_events.tsv beside it, or add annotations or a trigger "
                 "channel"),
    Case("no data file is named", brainvision({"DataFile=a.eeg": ""}),
         refused="names no data file (DataFile=); export the recording again"),
    Case("the data file is empty", brainvision(part=0.0),
         refused=f"its data file (.eeg) is empty; {_AGAIN}"),
    Case("the data file ends inside a sample", brainvision(part=0.4999),
         refused="its data file is cut off: 17,996 bytes for samples of 12 bytes; copy or export "
                 "the file again"),
    Case("fewer data points than promised",
         brainvision({"DataFormat=": "DataPoints=99999\nDataFormat="}),
         refused="its data file is cut off: 36,000 bytes for samples of 12 bytes, 99999 of them; "
                 "copy or export the file again"),
    Case("no number of channels", brainvision({"NumberOfChannels=3": ""}),
         refused=f"its header gives no number of channels (NumberOfChannels=); {_REPAIR}"),
    Case("no channels", brainvision({"NumberOfChannels=3": "NumberOfChannels=0"}),
         refused=f"its header gives 0 channels; {_REPAIR}"),
    Case("a million channels", brainvision({"NumberOfChannels=3": "NumberOfChannels=1000000"}),
         refused=f"its header gives 1000000 channels; {_REPAIR}"),
    Case("a channel that is not described", brainvision({"Ch2=Cz,,1,µV\n": ""}),
         refused=f"its header describes 2 of 3 channels (Ch2= is missing); {_REPAIR}"),
    Case("no sampling interval", brainvision({"SamplingInterval=10000": ""}),
         refused="its header gives no sampling interval above 0 (SamplingInterval=, microseconds, "
                 f"with a decimal point); {_REPAIR}"),
    Case("a sampling interval of 0", brainvision({"Interval=10000": "Interval=0"}),
         refused="its header gives no sampling interval above 0 (SamplingInterval=, microseconds, "
                 f"with a decimal point); {_REPAIR}"),
    Case("a sampling interval with a decimal comma",
         brainvision({"Interval=10000": "Interval=10000,0"}),
         refused="its header gives no sampling interval above 0 (SamplingInterval=, microseconds, "
                 f"with a decimal point); {_REPAIR}"),
    Case("a resolution with a decimal comma", brainvision({"Ch2=Cz,,1,": "Ch2=Cz,,0,1,"}),
         refused="its header gives channel 2 a resolution with a decimal comma; write it with a "
                 "decimal point"),
    Case("a resolution in words", brainvision({"Ch2=Cz,,1,": "Ch2=Cz,,fine,"}),
         refused=f"its header gives channel 2 a resolution that is no number; {_REPAIR}"),
    Case("a resolution of 0", brainvision({"Ch2=Cz,,1,": "Ch2=Cz,,0,"}),
         refused=f"its header gives channel 2 a resolution of 0; {_REPAIR}"),
    Case("a number format that is not known", brainvision({"IEEE_FLOAT_32": "IEEE_FLOAT_99"}),
         refused="its header names no number format that is known (BinaryFormat=); export it as "
                 "one of INT_16, UINT_16, INT_32, IEEE_FLOAT_32"),
    Case("microvolts called volts", brainvision({"µV": "V"}),
         warned="a trial typically spans 112,061,312 µV from peak to peak, far more than EEG "
                "(5,000 µV); check the unit in the file"),
    Case("a unit that is none", brainvision({"µV": "furlong"}),
         warned="no channel is marked as EEG; taken as EEG by name: Fp1, Cz, Oz"),
    Case("a marker without a position",
         brainvision(markers={"Mk2=Stimulus,S  1,401,1,0": "Mk2=Stimulus,S  1"}),
         refused=_POSITIONS, about="a.vmrk"),
    Case("a marker at a position in words",
         brainvision(markers={"Mk2=Stimulus,S  1,401": "Mk2=Stimulus,S  1,soon"}),
         refused=_POSITIONS, about="a.vmrk"),
    Case("markers in Latin-1", _latin1_markers, about="a.vmrk",
         refused="line 7 is not UTF-8 text; save the file as UTF-8"),
    Case("no orientation of the data", brainvision({"DataOrientation=MULTIPLEXED": ""}),
         refused="its header says neither DataOrientation=MULTIPLEXED nor VECTORIZED; correct the "
                 "header, or export the recording again"),
    Case("a channel that is a name alone", brainvision({"Ch2=Cz,,1,µV": "Ch2=Cz"}),
         refused="its header describes channel 2 by 1 values, not by name, reference, resolution "
                 f"and unit; {_REPAIR}"),
    Case("a data format that is not known", brainvision({"DataFormat=BINARY": "DataFormat=GOLD"}),
         refused=f"its header says neither DataFormat=BINARY nor ASCII; {_REPAIR}"),
    Case("a section twice", brainvision({"[Comment]": "[Common Infos]"}),
         refused="has a header whose text is damaged: a section or a key is missing or comes "
                 "twice; correct it, or export the recording again"),
    Case("markers beyond the end", brainvision(markers={",401,1,0": ",999999999,1,0"}),
         warned="some annotations lie outside the recording and were left out"),
    Case("a header with a byte-order mark and Windows line ends",
         brainvision({"Brain Vision Data Exchange H": "\ufeffBrain Vision Data Exchange H",
                      "Codepage=UTF-8\n": "Codepage=UTF-8\r\n"}),
         loaded=lambda trials: len(trials) == 11),
)  # fmt: skip
