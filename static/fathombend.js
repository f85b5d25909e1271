// Fathombend's only script. Every page works without it.
"use strict";
