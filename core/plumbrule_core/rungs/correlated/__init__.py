"""What the correlated rungs share: the reference, the integrals, the amplitudes' checkpoints and their extrapolation."""
