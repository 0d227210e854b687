"""Characteristics of sensors as pure functions: what a quantity does to a resistance or voltage."""
