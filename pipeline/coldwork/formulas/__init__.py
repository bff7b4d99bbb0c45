"""One published relation a file: arrays in, arrays out, SI, no files and no frames.

Each function computes a value; beside it stands the function of its
sensitivities, and the two together are a `Formula` constant in capitals.
"""
