"""The Build page: molecules, the picture, the recipe, and what can be said before a run."""
