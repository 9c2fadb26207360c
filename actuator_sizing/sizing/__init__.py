"""The chain: demand, screening, evaluation, checks, ranking, comparison."""
