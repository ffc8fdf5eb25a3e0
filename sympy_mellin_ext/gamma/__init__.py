"""Gamma products: algebra, poles, growth, Laurent expansion, shortest form."""
from .product import Factor, GammaProduct
from .shortest import shortest_quotient

__all__ = ["Factor", "GammaProduct", "shortest_quotient"]
