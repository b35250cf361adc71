"""The history: one SQLite file, one writer, any number of readers."""
