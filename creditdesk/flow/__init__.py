"""How a change runs through the statements: costs, working capital, interest, tax, profit, and the balancing line."""
