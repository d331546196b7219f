"""Strong correlation: active-space solvers, entropies, the proposal, tailored coupled cluster, growth."""
