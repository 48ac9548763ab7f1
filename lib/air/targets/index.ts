export {
  CO2_LIMITS,
  type Co2Limit,
  type Co2LimitPreset,
  DEFAULT_CO2_LIMIT,
  limitCaution,
  limitInWords,
  limitLevelPpm,
} from './limits'
export { EZ_ROWS, type EzRow, FLOW_PRESETS, type FlowPreset, getFlowPreset } from './presets'
export {
  type Basis,
  type BasisRoom,
  personsForFlow,
  type RequiredFlow,
  requiredFlowLps,
} from './required-flow'
