"""The equations: one file per group of terms, each kernel's docstring its equation.

Kernels take compute arrays (see ``grid.cgrid``) and trust them; ``experiment`` checks what goes in.
"""
