"""One file per view: data in, intents out."""
