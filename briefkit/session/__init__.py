"""The recurrent check without a screen: the deck, what it answers, its run, the log, and its printed sheets."""
