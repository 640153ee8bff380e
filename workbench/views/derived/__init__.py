"""From a store and a choice to what the panes show: pure functions, frozen dataclasses of arrays.

`index` holds what is made once a revision of the store; `settle` turns any choice into one that
the store can show; `loops`, `permeability`, `lossmap`, `readout` and `overview` make one thing each.
"""
