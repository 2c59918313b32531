"""Lines, differences, bias: arrays in, frozen results out."""
