"""Gamma products: algebra, poles, growth, Laurent expansion, shortest form."""
from .product import Factor, GammaProduct, Ladder
from .shortest import shortest_quotient

__all__ = ["Factor", "GammaProduct", "Ladder", "shortest_quotient"]
