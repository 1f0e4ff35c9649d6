ce_unit_test(estimate fieller invert check plan montecarlo)
