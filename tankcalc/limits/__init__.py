"""Levels of concern, rates, times to a limit, plans and alerts. None of it is a safety function.

settings    what a site chooses: dead bands, delays, how often readings are taken
levels      room, ullage and pumpable volume; how far apart levels of concern must lie
rates       rate of change from timed results, with its uncertainty
times       time to a level, early and late
mixing      what the tank holds after a receipt, or at another temperature
planner     how much, and when to call stop
plans       all answers to one question, as data
looks       one timed result, as the alerts see it
kinds       every alert there is, and what is the cause of what
conditions  what in a timed result is worth an alert
latch       one alert: raised, acknowledged, set aside, returned
alerts      alerts from a history of results and of what people did about them
"""
