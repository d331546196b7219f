"""What the correlated rungs share: reference, integrals, checkpoints of amplitudes, extrapolation."""
