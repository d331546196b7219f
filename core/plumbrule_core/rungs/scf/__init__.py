"""The self-consistent field: guesses, a ladder of measures, stability, checkpoints. HF and the functionals share it."""
