"""One small module a phenomenon; `registry` lists what formulas and the command line may call."""
