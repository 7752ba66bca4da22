"""Cases: a plant written down in a file, and the command that audits it.

Nothing is imported here, so that ``lostwork --help`` answers at once.
"""
