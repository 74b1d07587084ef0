"""Who may do what: owners, their keys, browsers that are signed in as a key, and how often each may ask."""
