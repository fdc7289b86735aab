"""Dialogs: how to cut, how to transform, which keys, about."""
