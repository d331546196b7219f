"""The words of the program as frozen, validated values; one definition for file, casebook and window."""
