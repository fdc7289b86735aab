"""Which channels are EEG, and what they are called."""

from __future__ import annotations

import re
from collections import Counter
from typing import TYPE_CHECKING

from phasebrush.recordings.words import LONGEST_NAME, plain_text, shortened

if TYPE_CHECKING:
    from collections.abc import Sequence

# EDF+ labels may begin with the kind of signal (Kemp & Olivan 2003, Clin Neurophysiol
# 114:1755-1761; EDF+ "standard texts").
_PREFIX = re.compile(r"^(EEG|EOG|ECG|EKG|EMG|Resp|Temp|SaO2|Light|Sound|Event|Pos|Stim)\s+(?=\S)")
# Common practice, no source: what spreadsheet programs take for the start of a formula.
_FORMULA = ("=", "+", "-", "@")
_NOT_EEG = re.compile(
    r"^[hv]?eog|^(e[ck]g|emg|resp|temp|sao2|spo2|pulse|pleth|gsr|eda|scl|light|sound|photo|"
    r"status|trig|trigger|stim|sti|event|marker|counter|acc|pos|pupil|audio|mic|annotations?)"
    r"(?![a-z])|(?<![a-z])(eog|e[ck]g|emg)(?![a-z])|annotations$",
    re.IGNORECASE,
)


def looks_like_eeg(name: str) -> bool:
    """Whether a channel that has no type is EEG, by its name."""
    return not _NOT_EEG.search(name.strip())


def shown_name(name: str) -> str:
    """Channel name without the ``EEG`` that EDF+ puts before it."""
    prefix = _PREFIX.match(name)
    return name[prefix.end() :].strip() if prefix and prefix[1] == "EEG" else name.strip()


def tidy_names(recorded: Sequence[str]) -> tuple[tuple[str, ...], tuple[str, ...]]:
    """Names as the screen and the command line use them: plain, short, unique.

    Returns
    -------
    names : tuple of str
        Without the prefix ``EEG``, without characters that cannot be shown, of 64
        characters at most, and unique.
    warnings : tuple of str
        What was changed, and what other programs may take for something else.
    """
    plain = [shown_name(plain_text(name)) for name in recorded]
    long = sum(len(name) > LONGEST_NAME for name in plain)
    odd = sum(" ".join(name.split()) != plain_text(name) for name in recorded)
    names, said = unique_names([shortened(name, LONGEST_NAME) for name in plain])
    more = []
    if odd:
        more.append(f"characters that cannot be shown were taken out of {_some(odd)}")
    if long:
        more.append(f"{_some(long)} of more than {LONGEST_NAME} characters, shortened")
    formulas = [name for name in names if name.startswith(_FORMULA)]
    if formulas:
        more.append(
            f"channel names that a spreadsheet would take for formulas: {listed(formulas)}; "
            "import them as text"
        )
    return names, (*said, *more)


def _some(number: int) -> str:
    return "1 channel name" if number == 1 else f"{number} channel names"


def unique_names(names: Sequence[str]) -> tuple[tuple[str, ...], tuple[str, ...]]:
    """Make names unique and non-empty.

    Returns
    -------
    names : tuple of str
        A repeated name gets a number (``Cz-2``), an empty one its place (``channel 7``).
    warnings : tuple of str
        What was changed.
    """
    counts = Counter(names)
    repeated = sorted(name for name, count in counts.items() if count > 1 and name)
    taken = {name for name, count in counts.items() if count == 1}
    seen: Counter[str] = Counter()
    unique: list[str] = []
    for place, name in enumerate(names, 1):
        seen[name] += 1
        wanted = name or f"channel {place}"
        number = seen[name]
        while (counts[name] > 1 or not name) and wanted in taken:
            number = max(number, 2)
            wanted = f"{name or f'channel {place}'}-{number}"
            number += 1
        taken.add(wanted)
        unique.append(wanted)
    said = []
    if repeated:
        said.append(f"channel names repeat and were numbered: {listed(repeated)}")
    if counts[""] == 1:
        said.append("1 channel has no name and was given one by its place")
    elif counts[""]:
        said.append(f"{counts['']} channels have no name and were given one by their place")
    return tuple(unique), tuple(said)


def listed(names: Sequence[str], limit: int = 8) -> str:
    """Names in a row, the rest counted: ``Fp1, Fp2 and 3 more``."""
    short = [shortened(name) for name in names[:limit]]
    if len(names) <= limit:
        return ", ".join(short)
    return f"{', '.join(short)} and {len(names) - limit} more"


def unusable_line(name: str, reason: str) -> str:
    """Say of one channel that it gives no voltages, and why."""
    return f"channel {shortened(name)} cannot be used: {reason}"


def bad_warning(names: Sequence[str]) -> tuple[str, ...]:
    """Say which channels the file marks as bad; nothing if there are none."""
    if not names:
        return ()
    return (f"marked as bad in the file, and left out of an average reference: {listed(names)}",)
