"""Flag varieties G/P, built from the Cartan matrix up."""
