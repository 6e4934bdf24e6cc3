"""From nets to pairs, from pairs to links."""
