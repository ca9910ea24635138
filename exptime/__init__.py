"""How much observing time buys which precision in a neutron star's mass and radius."""
