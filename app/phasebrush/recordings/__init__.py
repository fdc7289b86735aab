"""Files become trials here. The only room that imports mne."""

from phasebrush.recordings.cutting import cut_trials
from phasebrush.recordings.defaults import default_cut
from phasebrush.recordings.events import Events
from phasebrush.recordings.listing import list_recordings
from phasebrush.recordings.open_file import open_recording
from phasebrush.recordings.plan import CutPreview, preview_cut
from phasebrush.recordings.recording import Listed, Recording
from phasebrush.recordings.write_fif import write_fif

__all__ = [
    "CutPreview",
    "Events",
    "Listed",
    "Recording",
    "cut_trials",
    "default_cut",
    "list_recordings",
    "open_recording",
    "preview_cut",
    "write_fif",
]
