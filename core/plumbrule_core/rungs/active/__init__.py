"""What the rungs of an active space share: its division, exact diagonalisation, optimised orbitals, prices."""
