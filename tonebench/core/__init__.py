"""Pure filter mathematics: polar roots, section kinds, chains, responses, rings, hearing numbers."""
