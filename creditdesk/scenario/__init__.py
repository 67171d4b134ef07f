"""What-if on one borrower: marks, stress events, grids, break-evens, reach and simulation."""
