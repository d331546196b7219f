"""The self-consistent field of HF and the functionals: guesses, measures, stability, checkpoints."""
