"""What has to stand beside results on which a load depends."""

from __future__ import annotations

#: One line for the switch, one for what this package leaves out.
CAUTIONS = (
    "A functional switch is not a protective device: where a pump, heater, battery or mains load"
    " can do harm, fit an independent limiter.",
    "Isolation, creepage, EMC and surge are outside these results;"
    " local codes and licensed practice come first.",
)
