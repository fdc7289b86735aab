"""Bad input: tables of events and of channels beside a recording."""

from __future__ import annotations

from case import Case
from good_files import ONSETS_S, brainvision, edf, file, joined, table


def rows(*onsets: object, head: str = "onset\ttrial_type", end: str = "\n") -> str:
    """A table with an event of one kind at each onset."""
    return end.join([head, *(f"{onset}\tflash" for onset in onsets)]) + end


_TABLE = "a_events.tsv"


def _eleven(trials) -> bool:
    return len(trials) == 11 and set(trials.labels) == {"flash"}


def _responses(cells: list[str]) -> str:
    lines = [f"{at}\tflash\t{cell}" for at, cell in zip(ONSETS_S, cells, strict=False)]
    return "\n".join(["onset\ttrial_type\tresponse_time", *lines]) + "\n"


def _bids(channels: str):
    def make(folder):
        path = edf(name="sub-01_task-x_eeg.edf")(folder)
        (folder / "sub-01_task-x_channels.tsv").write_text(channels)
        return path

    return make


CASES = (
    Case("an empty table", table(""), about=_TABLE,
         refused="is empty; write at least a header row, or take the table away"),
    Case("a table of a header alone", table("onset\ttrial_type\n"), about=_TABLE,
         refused="holds no event; add a row for each event, its onset in seconds"),
    Case("a table without onsets", table("time\ttrial_type\n4\tflash\n"), about=_TABLE,
         refused="has no column named onset; add one, in seconds from the start"),
    Case("a table separated by commas", table("onset,trial_type\n4,flash\n"), about=_TABLE,
         refused="is separated by commas, not by tabs; save it as tab-separated text"),
    Case("a table separated by semicolons", table("onset;trial_type\n4;flash\n"), about=_TABLE,
         refused="is separated by semicolons, not by tabs; save it as tab-separated text"),
    Case("a row that is too short", table("onset\ttrial_type\n4\n"), about=_TABLE,
         refused="line 2 has 1 cells for 2 columns; separate cells by one tab each and write n/a "
                 "where there is no value"),
    Case("a column twice", table("onset\tonset\n4\t5\n"), about=_TABLE,
         refused="has a blank or repeated column name (BIDS allows neither); rename the column"),
    Case("a table in UTF-16", table(rows(*ONSETS_S).encode("utf-16")), about=_TABLE,
         refused="is not UTF-8 text; save the table as UTF-8"),
    Case("a table in Latin-1", table("onset\ttrial_type\n4\tgrün\n".encode("latin-1")),
         about=_TABLE,
         refused="is not UTF-8 text; save the table as UTF-8"),
    Case("an onset in words", table(rows(4, "soon")), about=_TABLE,
         refused="the onset of event 2 is not a number (onsets are seconds from the start); "
                 "correct it or take the row out"),
    Case("an infinite onset", table(rows(4, "inf")), about=_TABLE,
         refused="the onset of event 2 is not a number (onsets are seconds from the start); "
                 "correct it or take the row out"),
    Case("a missing onset", table(rows(4, "n/a")), about=_TABLE,
         refused="the onset of event 2 is missing; give it in seconds or take the row out"),
    Case("an onset with a decimal comma", table(rows("4,5", "6,5")), about=_TABLE,
         refused="the onset of event 1 is 4,5, with a decimal comma; write decimal points (4.5)"),
    Case("a negative onset", table(rows(-3, *ONSETS_S)),
         warned="1 of 12 events lies outside the recording (0 to 30 s; onsets run from -3 to 24 s)",
         loaded=_eleven),
    Case("an onset beyond the end", table(rows(*ONSETS_S, 99, 1e300)),
         warned="2 of 13 events lie outside the recording (0 to 30 s; onsets run from 4 to 1e+300 "
                "s)", loaded=_eleven),
    Case("onsets in milliseconds", table(rows(*(at * 1000 for at in ONSETS_S))), about=_TABLE,
         refused="none of its 11 events lies inside the recording (0 to 30 s; onsets run from 4000 "
                 "to 24000); give onsets in seconds from the recording's first sample"),
    Case("events too near the ends", table(rows(0.1, 29.9)),
         refused="no trials are left (2 of 2 events are too close to the start or end of the "
                 "recording and were left out); choose other labels or a shorter window"),
    Case("a byte-order mark", table(b"\xef\xbb\xbf" + rows(*ONSETS_S).encode()), loaded=_eleven),
    Case("Windows line ends", table(rows(*ONSETS_S, end="\r\n")), loaded=_eleven),
    Case("line ends of old", table(rows(*ONSETS_S, end="\r")), loaded=_eleven),
    Case("blank lines between", table(rows(*ONSETS_S, end="\n\n")), loaded=_eleven),
    Case("events out of order", table(rows(*ONSETS_S[::-1])),
         loaded=lambda trials: bool((trials.onsets_s == ONSETS_S).all())),
    Case("one event", table(rows(10)), loaded=lambda trials: len(trials) == 1),
    Case("response times with decimal commas", table(_responses(["0,5"] * 11)),
         warned="response_time has decimal commas; write decimal points: it is kept as a column "
                "and not used as response times"),
    Case("response times in words", table(_responses(["fast"] * 11)),
         warned="response_time holds text: it is kept as a column and not used as response times"),
    Case("response times in milliseconds", table(_responses(["512"] * 11)),
         warned="response times are read as seconds, and half are over 512: check"),
    Case("negative response times", table(_responses(["-0.1", *["0.4"] * 10])),
         warned="1 of 11 response times are negative: before the event"),
    Case("labels with an escape sequence", table("onset\ttrial_type\n8\t\x1b[2Jflash\x07\n"),
         loaded=lambda trials: trials.labels == ("[2Jflash",)),
    Case("a label of 10,000 characters", table("onset\ttrial_type\n8\t" + "f" * 10_000 + "\n"),
         cut={"labels": ("bell",)}, words=("--event", "bell"),
         refused=f"has no event 'bell'; choose among {'f' * 39}…"),
    Case("markers beside a table", joined(brainvision(), file(_TABLE, rows(8))),
         loaded=lambda trials: len(trials) == 1),
    Case("a table of channels that is none", _bids("name\ttype\nCz\n"),
         about="sub-01_task-x_channels.tsv",
         refused="line 2 has 1 cells for 2 columns; separate cells by one tab each and write n/a "
                 "where there is no value"),
    Case("a table of channels without EEG", _bids("name\ttype\nFp1\tEOG\nCz\tEOG\nOz\tEMG\n"),
         refused="none of its 3 channels is EEG; set the channel types in the file or in "
                 "channels.tsv"),
    Case("a table of channels that marks one as bad",
         _bids("name\ttype\tstatus\nFp1\tEEG\tbad\nCz\tEEG\tgood\nOz\tEEG\tgood\n"),
         warned="marked as bad in the file, and left out of an average reference: Fp1"),
)  # fmt: skip
