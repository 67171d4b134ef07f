"""Master scale, house rules and the reasons given for a grade."""
