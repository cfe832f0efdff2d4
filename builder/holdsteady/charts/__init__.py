"""From a finding to what a chart needs: one Vega-Lite specification a kind, and the data it binds."""
