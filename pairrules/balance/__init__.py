"""Source, cable and load models; how much common mode a link turns into signal, and which cause does it."""
