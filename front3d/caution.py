"""What is said wherever results are shown."""

CAUTION = (
    "An engineering aid. Whether a cracked part is fit for service is decided by qualified "
    "engineers under the governing code, not by this program."
)
