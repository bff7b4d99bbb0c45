"""The scenario of the sample batches, one module a batch, and the laws behind them."""
