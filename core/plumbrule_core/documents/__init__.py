"""The words of the program as frozen, validated values; one definition for TOML, JSON, casebook and window."""
