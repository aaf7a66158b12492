"""Keys of the workshop: the records root and seal, and the keys of devices.

`sealing` makes, loads and names the two certificates under which records are sealed;
`devices` makes the desk's own key and checks what any device signed. Nothing here knows records or the journal.
"""
