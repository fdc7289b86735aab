"""What was done, in the words of a methods section: a file for each part of it."""
