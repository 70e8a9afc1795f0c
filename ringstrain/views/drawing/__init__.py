"""Pictures of states: placed in space for the eye only, projected, labelled, written as SVG, PNG or text."""
