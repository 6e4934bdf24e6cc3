"""What the copper of a link looks like: routes, spacing, loop area, neighbours, reference cover. Lengths in mm."""
