"""The commands, one module each: what was parsed goes in, the exit status comes out."""
