"""Commands that measure the package on lists of published integrals."""
