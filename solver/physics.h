/* physics.h: constants of nature and of the temperature scale. */
#ifndef CORESOAK_PHYSICS_H
#define CORESOAK_PHYSICS_H

#define STEFAN_BOLTZMANN 5.670374419e-8   /* W/(m2.K4); exact in the SI of 2019, CODATA 2018 */
#define GAS_CONSTANT     8.31446261815324 /* J/(mol.K); exact in the SI of 2019, CODATA 2018 */
#define ZERO_CELSIUS     273.15           /* K */

#endif
