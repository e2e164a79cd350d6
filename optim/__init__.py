"""The search: a requirements file in, Pareto fronts and recommended designs out."""
