"""Field solution of a cross-section, line matrices, chains of sections. Numbers in, numbers out.

SI units unless a name or docstring says otherwise.
"""
