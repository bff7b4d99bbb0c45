"""The chain by Monte Carlo: draws of inputs, the same chain, what its draws say."""
