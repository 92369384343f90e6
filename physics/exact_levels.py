from physics.ideal_bose import IdealBose as ExactLevels
