"""What every report that people read says of its own worth."""

from __future__ import annotations

CAUTIONS = (
    "All figures are estimates from the exported copper. They are no proof of isolation, of electromagnetic "
    "compatibility or of safety. Measure the built board; local codes and licensed practice decide."
)
