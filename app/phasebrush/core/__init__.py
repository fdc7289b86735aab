"""The numbers: pure functions and small classes on arrays. Imports numpy and scipy only."""
