"""Texts made fit to be shown; trigger channels read in pieces."""

from __future__ import annotations

import numpy as np
import pytest

from phasebrush.recordings import triggers
from phasebrush.recordings.channels import tidy_names
from phasebrush.recordings.events import nearest_samples
from phasebrush.recordings.words import plain_text, shortened


@pytest.mark.parametrize(("text", "plain"), [
    ("Fp1", "Fp1"),
    ("  left   hand ", "left hand"),
    ("grün / 左 / ٣", "grün / 左 / ٣"),
    ("e\u0301", "e\u0301"),  # an accent of its own is a letter's part
    ("a\tb\r\nc\u2028d", "a b c d"),
    ("\x1b]0;title\x07Oz", "]0;titleOz"),  # would rename a terminal's window
    ("\u202egnp.exe\u202c", "gnp.exe"),  # would be read from right to left
    ("\ufeffOz\u200b", "Oz"),
    ("\0", ""),
    ("\ud800Oz", "Oz"),
])  # fmt: skip
def test_plain_text_keeps_letters_and_drops_orders(text, plain):
    assert plain_text(text) == plain
    assert plain_text(plain) == plain
    assert plain.isprintable()


def test_long_texts_end_in_an_ellipsis():
    assert shortened("x" * 40) == "x" * 40
    assert shortened("x" * 41) == "x" * 39 + "…"
    assert len(shortened("x" * 900, 64)) == 64


def test_names_that_become_equal_are_told_apart():
    names, said = tidy_names(["EEG Oz", "Oz\x07", "y" * 100, "y" * 101])
    assert names[:2] == ("Oz", "Oz-2")
    assert len(set(names)) == 4
    assert "characters that cannot be shown were taken out of 1 channel name" in said
    assert "2 channel names of more than 64 characters, shortened" in said


@pytest.mark.parametrize("piece", [1, 2, 3, 7, 64, 10_000])
def test_a_trigger_channel_in_pieces_gives_what_it_gives_at_once(monkeypatch, piece):
    """Codes, single samples of transition and glitches fall on the seams of the pieces."""
    rng = np.random.default_rng(3)
    codes = np.repeat(rng.choice([0, 0, 1, 2, 3], 400), rng.integers(1, 5, 400))
    samples, values = triggers.code_onsets(codes)
    assert len(samples) > 100
    monkeypatch.setattr(triggers, "_BLOCK", piece)
    events = triggers.read_trigger_events(
        lambda start, stop: codes[start:stop].astype(float),
        name="STI", n_samples=len(codes), sfreq_hz=100.0,
    )  # fmt: skip
    np.testing.assert_array_equal(events.onset_samples, samples)
    assert events.labels == tuple(str(value) for value in values)


def test_times_that_no_recording_lasts_stay_whole_numbers():
    times_s = np.array([-1e300, -1.0, 0.004, 1e17, np.finfo(float).max])
    samples = nearest_samples(times_s, 250.0)
    np.testing.assert_array_equal(samples, [-(2**53), -250, 1, 2**53, 2**53])
