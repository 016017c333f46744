"""The eclipsed light of two limb-darkened spheres."""
