"""What the circuit does: stages, the continuous model they make, its discrete steps."""
