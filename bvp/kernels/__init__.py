"""Kernels: free functions on arrays, compiled by numba; one decorator, no allocation, no exceptions."""
