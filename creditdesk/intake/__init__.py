"""Reading figures as people write them."""
