"""The uncertainty campaign: hundreds of problems whose turning points are known by other means than differences.

`python -m tests.campaign.make` works the truths out and writes problems.json; `python -m tests.campaign.run` holds the tool against
them. Every truth has two origins that agree to 1e-11 or better, neither of them a difference scheme: closed forms, quadrature of the
energy integral, Chebyshev collocation refined in 34 digits, shooting with an eighth-order method.
"""
