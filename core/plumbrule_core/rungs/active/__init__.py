"""What the rungs of an active space share: its division, its states, optimised orbitals, prices."""
