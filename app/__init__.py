"""The command line and the dashboard: they ask `analysis`, keep its answers and draw them."""
