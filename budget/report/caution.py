"""What every report, the manual and the start of a new run say."""

CAUTION = (
    "This is a design calculation. Pipes and ducts hold hot, pressurised or moving media. A competent, licensed "
    "engineer checks it against the codes that apply locally and the makers' data; commissioning proves it."
)
