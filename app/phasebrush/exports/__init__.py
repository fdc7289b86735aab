"""What leaves the program as files: tables, trial lists, data, the session report, the recipe."""
