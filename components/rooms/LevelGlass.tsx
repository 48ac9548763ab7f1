// the glass moved to components/ui, for sensors and digests draw it too
export * from '@/components/ui/LevelGlass'
