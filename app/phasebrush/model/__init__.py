"""What the person decided, what follows from it, and the one way between the two."""
