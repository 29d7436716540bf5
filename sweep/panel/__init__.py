"""Data: files, calendars, series, and the scales and samples on which they enter."""
