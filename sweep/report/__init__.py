"""The report: tables, notes and one self-contained page."""
