"""What population: areas and lists, with strata and measure."""
