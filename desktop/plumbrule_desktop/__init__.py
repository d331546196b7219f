"""The window of Plumbrule."""
