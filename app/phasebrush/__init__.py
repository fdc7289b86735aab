"""Phasebrush: find out what an average of stimulus-locked EEG trials is made of."""

__version__ = "0.1.0"
