"""What to record next: half-widths and power to expect, and the recordings that earn most.

Public entry points are `plan.plan` for a campaign and `plan.plan_assumed` for scatters that are assumed;
`next_steps` is the part of it that `couple` reports.
"""
