"""One file a verb of the command line: `arguments(parser)` and `run(args)`.

Found by listing, loaded only when called.
"""
