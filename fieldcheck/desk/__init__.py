"""The desk: one Flask application with the workshop's pages, the phone's files and the phone's API.

`app.create_app` makes it, `server.serve` runs it on this machine only.  One blueprint a noun; `workshop.Workshop` is
what they all share: the journal, the rulebook and the fold of all events.
"""
