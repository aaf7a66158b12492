"""The phone: screens, store and outbox. Run by Brython in the browser."""
