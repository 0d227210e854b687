"""What the user writes: a TOML file becomes frozen, validated values."""
