"""Reference limits: arrays in, frozen results out."""
