"""So what: analyses that an engineer asks for; none of them imports another."""
