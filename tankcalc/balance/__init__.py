"""The balance: movements against physical change, and what the differences are worth.

effects     what makes a state's figures wrong, and what two states share of it
account     one tank over one period: book, physical, difference and its significance
cusum       small losses that go on: cumulative sums over periods
causes      the differences regressed on time, throughput and table shape
transfers   what left one tank against what came into another
drift       a tank at rest: the slope of its mass, with an honest standard error
states      a reading's result as a state with amounts and effects

history     standing readings and movements of the log
origins     what two of its readings share
contents    its readings as states, each worked out once
moves       its movements in mass and standard volume
periods     a tank's span cut into periods
rest        a tank's longest time at rest
site        all tanks of a site
notes       what must be known to read a balance
lines       balances as text
shown       balances as JSON data

The first seven know nothing of the log.
"""
