"""The words of the program as frozen, validated values: the one definition for TOML, JSON, casebook and window."""
