import type { Air } from './types'

const GAS_CONSTANT = 8.314462618
const DRY_AIR_KG_PER_MOL = 0.0289644
const WATER_KG_PER_MOL = 0.01801528

export interface AirConditions {
  temperatureC: number
  /** Pa; 101325 where left out. */
  pressurePa?: number
  /** Relative humidity, 0 to 1; dry where left out. */
  relativeHumidity?: number
}

/**
 * Density and sound speed of air.
 *
 *   rho = (p - e) M_a / (R T) + e M_w / (R T),  c = sqrt(gamma p / rho)
 *   e = humidity * 611.2 exp(17.62 t / (243.12 + t)) Pa (Magnus);  gamma = 1.400 - 0.07 e/p
 *
 * Dry air at 15 deg C and 101325 Pa: 1.225 kg/m3, 340.29 m/s.
 * @throws RangeError outside -40 to 60 deg C, 30 to 120 kPa or humidity 0 to 1: no bench is there
 * Source: ISO 2533:1975 (dry air); WMO-No. 8, annex 4.B (Magnus formula over water).
 */
export function airAt(conditions: AirConditions): Air {
  const { temperatureC, pressurePa = 101_325, relativeHumidity = 0 } = conditions
  if (!(temperatureC >= -40 && temperatureC <= 60)) throw new RangeError(`air temperature must lie from -40 to 60 deg C, not ${temperatureC}`)
  if (!(pressurePa >= 30_000 && pressurePa <= 120_000)) throw new RangeError(`air pressure must lie from 30 to 120 kPa, not ${pressurePa} Pa`)
  if (!(relativeHumidity >= 0 && relativeHumidity <= 1)) throw new RangeError(`relative humidity must lie from 0 to 1, not ${relativeHumidity}`)
  const kelvin = temperatureC + 273.15
  const vapour = relativeHumidity * 611.2 * Math.exp(17.62 * temperatureC / (243.12 + temperatureC))
  const densityKgM3 = ((pressurePa - vapour) * DRY_AIR_KG_PER_MOL + vapour * WATER_KG_PER_MOL) / (GAS_CONSTANT * kelvin)
  const gamma = 1.4 - 0.07 * vapour / pressurePa
  return { densityKgM3, soundSpeedMPerS: Math.sqrt(gamma * pressurePa / densityKgM3) }
}
