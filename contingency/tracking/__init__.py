"""From one revision to the next: bridge, trend, drawdown."""
