"""Closed forms against numerical quadrature."""
