"""Faults of the program itself: one line, one report without data or names, the work kept aside."""

from __future__ import annotations

import sys
import threading

import pytest
from fault_tools import hooks, kept_work, lines, lives_on, picked, window_with_work
from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication, QPushButton
from window_tools import settle, turn, wait_for

from phasebrush.errors import InputError
from phasebrush.gui import trouble
from phasebrush.model import channel_work, intents, slow_work, transform_room
from phasebrush.model.recovery import EVERY_CHANGES, offers
from phasebrush.sample_files import sample_recordings

PERSON = "Thornquist"
FAULT_LINE = "this did not work (ZeroDivisionError); what was open stays as it was"


@pytest.fixture
def window(open_window, trials, tmp_path):
    return window_with_work(open_window, trials, tmp_path / "aside")


def break_down(*_arguments, **_options):
    """A fault that quotes the file it was about, as messages of libraries do."""
    patient = PERSON
    raise ZeroDivisionError(f"/home/lab/{patient}/visit.edf")


def assert_reported(window, *, kept: str = trouble.KEPT) -> str:
    """One dialog, with a report that holds no message, no value and no path of the machine."""
    dialog = window.trouble.dialog
    assert dialog is not None
    assert dialog.isVisible()
    assert not dialog.isModal()
    assert "a fault of its own (ZeroDivisionError)" in dialog.words
    assert dialog.words.endswith(kept)
    report = dialog.report
    for said in (report, dialog.words, *lines(window)):
        assert PERSON not in said
        assert "visit.edf" not in said
        assert "/home" not in said
        assert sys.prefix not in said
    assert report.startswith("Phasebrush ")
    assert "fault: ZeroDivisionError" in report
    if kept == trouble.KEPT:
        assert kept_work(window).a == picked(window)
    return report


def test_a_job_that_fails_is_one_line_and_a_report(window, monkeypatch):
    with monkeypatch.context() as broken:
        broken.setattr(channel_work, "transform", break_down)
        window.workbench.do(intents.show_channel("Pz"))
        settle(window)
    assert lines(window) == [FAULT_LINE]
    report = assert_reported(window)
    assert "model/channel_work.py:" in report
    assert "transform_channel" in report
    window.workbench.compute_again()
    settle(window)
    lives_on(window)


@pytest.mark.parametrize(
    ("room", "name"),
    [(slow_work, "work_out_rested"), (slow_work, "compare_subsets"), (slow_work, "work_out_steps")],
)
def test_each_kind_of_slower_work_may_fail(window, monkeypatch, room, name):
    with monkeypatch.context() as broken:
        broken.setattr(room, name, break_down)
        window.workbench.want_steps(wanted=True)
        window.workbench.do(intents.swap_subsets())
        settle(window)
        window.workbench.compare()
        settle(window)
    assert lines(window) == [FAULT_LINE]
    assert_reported(window)
    window.workbench.compute_again()
    window.workbench.want_steps(wanted=False)
    settle(window)
    lives_on(window)


def test_an_answer_that_cannot_be_taken_leaves_no_job_behind(open_window, trials, tmp_path):
    window = window_with_work(open_window, trials, tmp_path / "aside", threaded=True)
    with hooks(window), pytest.MonkeyPatch.context() as broken:
        broken.setattr(window.workbench._deriver, "take_work", break_down)
        window.workbench.do(intents.show_channel("Pz"))
        wait_for(lambda: window.trouble.dialog is not None, "the report")
        assert window.workbench.jobs.running == ()
    assert_reported(window)
    window.workbench.compute_again()
    settle(window)
    lives_on(window)


def test_memory_that_runs_out_within_a_job_is_one_line(window, monkeypatch):
    def no_memory(*_arguments, **_options):
        raise MemoryError

    with monkeypatch.context() as broken:
        broken.setattr(channel_work, "transform", no_memory)
        window.workbench.do(intents.show_channel("Pz"))
        settle(window)
    assert lines(window) == [trouble.NO_MEMORY]
    assert window.trouble.dialog is None
    window.message_bar.dismiss()
    window.workbench.compute_again()
    settle(window)
    lives_on(window)


def test_a_transform_without_room_is_refused_with_what_would_fit(window, monkeypatch):
    """Sixty trials of 1.4 s every 8 ms take 8 bytes a point: 40 frequencies 3.4 MB."""
    settings = window.workbench.state.transform
    fixed = transform_room.bytes_needed(1, 2, settings, sfreq_hz=250.0, window_s=(0.0, 0.004))

    def no_transform(*_arguments, **_options):
        raise AssertionError("it was begun")

    with monkeypatch.context() as broken:
        broken.setattr(channel_work, "transform", no_transform)
        free = int((fixed + 1.7e6) / transform_room.PART_OF_FREE)
        broken.setattr(transform_room, "free_bytes", lambda: free)
        window.workbench.do(intents.show_channel("Pz"))
        settle(window)
        (line,) = lines(window)
        assert line.startswith("60 trials at 40 frequencies need ")
        assert "and there is room for " in line
        count = int(line.partition("choose at most ")[2].split()[0])
        assert 2 <= count < 40
    window.message_bar.dismiss()
    with monkeypatch.context() as broken:
        broken.setattr(transform_room, "free_bytes", lambda: free)
        fits = type(settings)(count=count)
        window.workbench.do(intents.transform_with(fits))
        settle(window)
        assert lines(window) == [], "what the line says would fit does not"
        assert window.workbench.snapshot.coefficients.freqs_hz.size == count
    lives_on(window)


# -- what nothing else caught -----------------------------------------------------------------


def test_a_slot_that_fails_is_one_line_and_a_report(window):
    button = QPushButton("fails", window)
    button.clicked.connect(break_down)
    with hooks(window):
        button.click()
        turn()
    assert lines(window) == [FAULT_LINE]
    assert_reported(window)
    window.trouble.dialog.close()
    turn()
    assert window.trouble.dialog is None
    lives_on(window)


def test_a_thread_that_fails_is_a_report_in_the_window(window):
    with hooks(window):
        thread = threading.Thread(target=break_down)
        thread.start()
        thread.join(10)
        turn()
    assert_reported(window)
    lives_on(window)


def test_a_view_that_cannot_be_drawn_does_not_stop_the_others(window, monkeypatch):
    shows = window.docks.views.readout.shows
    with hooks(window), monkeypatch.context() as broken:
        broken.setattr(window.bench.average, "show_snapshot", break_down)
        window.workbench.do(intents.swap_subsets())
        settle(window)
        assert window.docks.views.readout.shows > shows
    assert lines(window) == [FAULT_LINE]
    assert_reported(window)
    window.workbench.undo()
    settle(window)
    lives_on(window)


def test_a_frame_that_cannot_be_derived_is_tried_again(window, monkeypatch):
    derive = "phasebrush.model.derive.derive_readout"
    with hooks(window), monkeypatch.context() as broken:
        broken.setattr(derive, break_down)
        window.workbench.do(intents.swap_subsets())
        turn()
        wait_for(lambda: window.trouble.dialog is not None, "the report")
    assert_reported(window)
    window.clock.request()
    settle(window)
    assert window.workbench.snapshot.outdated == frozenset()
    lives_on(window)


def test_a_storm_of_one_fault_is_one_line_and_one_dialog(window):
    timer = QTimer(window)
    timer.timeout.connect(break_down)
    saves = []
    with hooks(window), pytest.MonkeyPatch.context() as counted:
        counted.setattr(window.trouble, "_keep", lambda: bool(saves.append(1)) or True)
        before = len(QApplication.topLevelWidgets())
        timer.start(0)
        for _ in range(200):
            turn(1)
        timer.stop()
        turn()
        assert len(QApplication.topLevelWidgets()) == before + 1
    assert lines(window) == [FAULT_LINE]
    assert len(saves) == 1
    assert window.trouble.dialog.report.count("fault: ") == 1


def test_another_fault_is_added_to_the_report_that_is_open(window):
    def other(*_words):
        raise KeyError(PERSON)

    with hooks(window):
        for fault in (break_down, other):
            QTimer.singleShot(0, window, fault)
            turn()
    dialog = window.trouble.dialog
    assert "fault: ZeroDivisionError" in dialog.report
    assert "fault: KeyError" in dialog.report
    assert "(ZeroDivisionError, KeyError)" in dialog.words
    assert PERSON not in dialog.report


def test_what_a_person_can_act_on_is_a_line_and_no_report(window):
    def refuse(*_words):
        raise InputError("is empty", "choose another", "a.edf")

    with hooks(window):
        QTimer.singleShot(0, window, refuse)
        turn()
    assert lines(window) == ["a.edf: is empty; choose another"]
    assert window.trouble.dialog is None


def test_work_that_cannot_be_kept_is_not_said_to_be(window, monkeypatch):
    def full(_workspace):
        raise InputError("work cannot be kept aside", "save it", "aside")

    monkeypatch.setattr(window.keeper._recovery, "save", full)
    with hooks(window):
        QTimer.singleShot(0, window, break_down)
        turn()
    assert_reported(window, kept=trouble.NOT_KEPT)


def test_without_unsaved_work_nothing_is_said_to_be_kept(open_window, trials):
    window = open_window(trials)
    with hooks(window):
        QTimer.singleShot(0, window, break_down)
        turn()
    assert_reported(window, kept=trouble.NOTHING_UNSAVED)


def test_the_report_is_copied(window):
    with hooks(window):
        QTimer.singleShot(0, window, break_down)
        turn()
    dialog = window.trouble.dialog
    QApplication.clipboard().clear()
    dialog._copy.click()
    assert QApplication.clipboard().text() == dialog.report != ""


def test_the_hooks_go_as_they_came(window):
    before = sys.excepthook, threading.excepthook
    with hooks(window):
        assert sys.excepthook is not before[0]
    assert (sys.excepthook, threading.excepthook) == before


def test_an_interruption_from_the_terminal_closes_in_order(open_window, trials, tmp_path):
    window = window_with_work(open_window, trials, tmp_path / "aside")
    path = window.keeper._recovery.path

    def interrupt(*_words):
        raise KeyboardInterrupt

    with hooks(window):
        QTimer.singleShot(0, window, interrupt)
        turn()
    assert path.exists()


# -- closing ----------------------------------------------------------------------------------

KINDS = ("read", "cut", "transform", "rest", "steps", "compare", "save", "aside", "workspace")


def start(window, kind: str, tmp_path) -> None:
    """Start a job of this kind, as the person or the program does."""
    bench, keeper = window.workbench, window.keeper
    if kind == "read":
        window.open_path(str(sample_recordings()[1]))
    elif kind == "cut":
        bench._incoming.cut_again(bench.state.cut)
    elif kind == "transform":
        bench.do(intents.show_channel("Pz"))
        bench.flush()
    elif kind == "rest":
        bench.do(intents.swap_subsets())
        bench.flush()
    elif kind == "steps":
        bench.want_steps(wanted=True)
        bench.flush()
    elif kind == "compare":
        bench.compare()
    elif kind == "save":
        keeper.save(str(tmp_path / "work.phasebrush.json"))
    elif kind == "aside":
        for _ in range(EVERY_CHANGES):
            keeper._recovery.note_change()
        keeper.keep_aside()
    else:
        keeper.open(str(tmp_path / "nowhere.phasebrush.json"))


@pytest.mark.parametrize("kind", KINDS)
def test_closed_during_a_job_the_work_is_there_at_the_next_start(
    open_window, trials, tmp_path, kind
):
    window = window_with_work(open_window, trials, tmp_path / "aside", threaded=True)
    with hooks(window):
        start(window, kind, tmp_path)
        who = picked(window)
        assert window.workbench.jobs.runs(kind), "the job is over before the window is closed"
        window.close()
        turn()
    left = list(offers(tmp_path / "aside"))
    assert len(left) == 1
    assert left[0].read().a == who
    assert not list(tmp_path.glob(".*"))
