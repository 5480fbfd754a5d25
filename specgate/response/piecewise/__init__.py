"""Every question over time of a response that is smooth piece by piece, answered by way of its pieces alone."""

from specgate.response.piecewise.response import PiecewiseResponse

__all__ = ["PiecewiseResponse"]
