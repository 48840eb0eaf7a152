"""Reading observations, checking them, and the conditions they give."""
