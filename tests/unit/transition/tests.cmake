ce_unit_test(transition find)
