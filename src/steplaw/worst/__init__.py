"""Worst cases: the inputs of a size with the largest figure, and how that grows"""
