"""Commands, the Python interface behind them, and the processes that they run in."""
