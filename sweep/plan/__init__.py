"""From a TOML file to a table of specifications; pure, nothing is estimated."""
