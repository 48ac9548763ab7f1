/**
 * Where the numbers and equations come from. `seen` means the passage was read in the document or in publications that quote it;
 * `from memory` means it is well known but was not read again, so a user must check it against their own copy.
 */
export type SourceStatus = 'seen' | 'from memory'

export type Source = { title: string; edition: string; status: SourceStatus; note?: string }

/** Shown wherever a number from memory, or one quoted second-hand, is used. */
export const CHECK_YOUR_COPY =
  'Check against your copy of the standard; national annex and edition may differ'

export const SOURCES = {
  en16798Flows: {
    title: 'EN 16798-1, annex B, default ventilation rates',
    edition: 'EN 16798-1:2019',
    status: 'from memory',
  },
  en16798Co2: {
    title: 'EN 16798-1, annex B, default CO2 above outdoor',
    edition: 'EN 16798-1:2019',
    status: 'seen',
    note: 'seen quoted in other publications (among them Honan et al. 2026, Sensors 26:1265), not in the standard itself',
  },
  en16798Generation: {
    title: 'EN 16798-1, default CO2 emission of 20 L/h per person',
    edition: 'EN 16798-1:2019',
    status: 'seen',
    note: 'seen quoted in a building-criteria page, not in the standard itself',
  },
  ashrae621Rates: {
    title: 'ASHRAE 62.1, ventilation rate procedure, table of minimum rates',
    edition: 'ASHRAE 62.1-2016, Table 6.2.2.1 (Table 6-1 in later editions)',
    status: 'seen',
  },
  ashrae621Offices: {
    title: 'ASHRAE 62.1, ventilation rate procedure, office and conference rates',
    edition: 'ASHRAE 62.1-2022, Table 6-1',
    status: 'seen',
    note: 'seen in public summaries of the code',
  },
  ashrae621Memory: {
    title: 'ASHRAE 62.1, ventilation rate procedure, table of minimum rates',
    edition: 'ASHRAE 62.1-2019/2022, Table 6-1',
    status: 'from memory',
  },
  ashrae621Ez: {
    title: 'ASHRAE 62.1, zone air distribution effectiveness Ez',
    edition: 'ASHRAE 62.1-2019/2022, Table 6-4',
    status: 'from memory',
  },
  hse: {
    title: 'HSE, Using CO2 monitors (hse.gov.uk/ventilation)',
    edition: 'web page as read 2026',
    status: 'seen',
  },
  uba: {
    title: 'German Federal Environment Agency, Health evaluation of carbon dioxide in indoor air',
    edition: 'Bundesgesundheitsblatt 2008',
    status: 'seen',
  },
  bb101: {
    title: 'UK Department for Education, Building Bulletin 101',
    edition: 'BB101:2018',
    status: 'from memory',
  },
  who: {
    title: 'WHO, Roadmap to improve and ensure good indoor ventilation',
    edition: '2021',
    status: 'from memory',
  },
  adf: {
    title: 'UK Approved Document F, volume 2, offices',
    edition: '2021',
    status: 'from memory',
  },
  persily: {
    title:
      'Persily & de Jonge, Carbon dioxide generation rates for building occupants, Indoor Air 27:868–879',
    edition: '2017, doi 10.1111/ina.12383',
    status: 'seen',
    note: 'equations 8 to 11 and Table 4 seen in transcriptions that agree',
  },
  schofield: {
    title: 'Schofield, Predicting basal metabolic rate, Human Nutrition: Clinical Nutrition 39C suppl. 1',
    edition: '1985',
    status: 'seen',
    note: 'seen in an encyclopaedia',
  },
  dubois: {
    title: 'ASHRAE Fundamentals / ASTM D6245-12, CO2 generation by DuBois surface',
    edition: 'D6245-12',
    status: 'from memory',
  },
  roulet: {
    title: 'Roulet, Ventilation and Airflow in Buildings, chapter 3, equations 3.8–3.15',
    edition: '2008',
    status: 'seen',
  },
  rudnickMilton: {
    title:
      'Rudnick & Milton, Risk of indoor airborne infection transmission estimated from CO2, Indoor Air 13:237',
    edition: '2003',
    status: 'from memory',
  },
  astmD6245: {
    title: 'ASTM D6245, percent outdoor air from CO2 at the air handler',
    edition: 'D6245-18/-24',
    status: 'seen',
  },
} as const satisfies Record<string, Source>

export type SourceKey = keyof typeof SOURCES

/** The sentence to show beside a number of this source; null where the document itself was read. */
export function cautionOf(key: SourceKey): string | null {
  const source: Source = SOURCES[key]
  return source.status === 'from memory' || source.note !== undefined ? CHECK_YOUR_COPY : null
}
