"""Side-by-side frequentist and Bayesian re-analysis."""
