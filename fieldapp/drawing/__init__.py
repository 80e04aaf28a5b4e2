"""The page's pictures: net, funnel, plan, verdict sign and keys, drawn from plain values."""
