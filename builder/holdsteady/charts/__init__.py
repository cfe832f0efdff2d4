"""From a finding to what a chart needs: one Vega-Lite specification per kind of chart, and the data it binds."""
