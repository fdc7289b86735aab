"""Invented demo recordings with known ground truth."""
