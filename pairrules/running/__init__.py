"""How a run goes about its work: pair after pair, in several processes, and what is kept for the next run."""
