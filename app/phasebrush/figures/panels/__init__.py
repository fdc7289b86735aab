"""One file a kind of panel: each draws into one axes from the snapshot."""
