"""The typed model: frozen, slotted, keyword-only values; standard library and numpy only."""
