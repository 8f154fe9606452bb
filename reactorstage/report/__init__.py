"""Tables as data, sentences, figures, JSON and CSV of what a train does."""
