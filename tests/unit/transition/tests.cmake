ce_unit_test(transition find construct relax invariance flags)
