"""Where cclib stops or errs on outputs that real programs print: one module a program, each a subclass of its reader.

The table of programs names the repaired class in the place of cclib's own. Each repair says what is wrong with which
output and is tested alone.
"""
