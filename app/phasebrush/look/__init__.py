"""Colours as numbers, for the window and for printed pages alike. No Qt."""
