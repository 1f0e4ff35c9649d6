ce_unit_test(fit flory_fox nls eiv relation stats robust refuse fit memory)
foreach(function IN ITEMS malloc calloc reallocarray strdup)
  target_link_options(test_fit_memory PRIVATE "LINKER:--wrap=${function}")
endforeach()
