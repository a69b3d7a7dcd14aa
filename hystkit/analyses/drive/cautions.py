"""What has to stand beside a drive, because it can hurt someone or destroy a part."""

from __future__ import annotations

#: For whatever a drive switches.
FUNCTIONAL = (
    "A functional switch is not a protective device: fit an independent limiter where the load"
    " can do harm when it stays on, or stays off."
)
#: For coils.
KICK_BACK = (
    "A coil that is switched off drives its voltage up until something conducts: place the clamp"
    " at the coil, check its polarity, and do not operate the coil without it."
)
CONTACTS = (
    "Contacts that switch mains: insulation, creepage, fusing and surge are outside these results;"
    " local codes and licensed practice come first."
)
#: For optocouplers.
ISOLATION = (
    "The isolation of an optocoupler is that of its approval and of the board's creepage and"
    " clearance, which are outside these results."
)
