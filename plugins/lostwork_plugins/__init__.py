"""The plugins that ship with lostwork, each registered through the entry-point group `lostwork`."""
