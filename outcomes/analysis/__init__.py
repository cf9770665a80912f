"""Pure estimators over arrays and frames. Every function returns a `Result` that carries its method."""
