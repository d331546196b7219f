"""Strong correlation: solvers of the active space, entropies, the proposal, tailored coupled cluster, growth."""
