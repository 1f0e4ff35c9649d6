ce_unit_test(simulate run physics refusals)
