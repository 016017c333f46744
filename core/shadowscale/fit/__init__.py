"""The solution: system, least squares, covariance, alternatives."""
