"""From a spec of any width to a network: every kind of spec body has its way here."""
