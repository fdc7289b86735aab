"""Figure pages, drawn with matplotlib from the snapshot that the window is drawn from."""
