"""The errors of the project: one family, every message a sentence for the maker (what, where, what to do)."""


class SeamwrightError(ValueError):
    """Anything the maker can put right."""


class FormError(SeamwrightError):
    """The form cannot be covered as it is: says what is wrong, where (first few indices) and what to do."""


class WishError(SeamwrightError):
    """A wish is wrong or contradicts another: says which and why."""


class CoverError(SeamwrightError):
    """A sound form and sound wishes, and still no pattern: says which form and what would help."""
