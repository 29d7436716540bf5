"""Published or simulated critical values as data, each with its provenance; none needed yet."""
