"""The store of outcomes: one DuckDB file, one writer, views that define what survives."""
