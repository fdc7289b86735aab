"""Files become trials here. The only room that imports mne."""
