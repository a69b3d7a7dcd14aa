"""Why: node equations to switching law, exact, and its LaTeX."""
