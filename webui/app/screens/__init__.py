"""One room a kind of screen."""
